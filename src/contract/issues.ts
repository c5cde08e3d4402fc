import type { z } from 'zod';
import { type Findings, type Path, valueAt } from './findings.js';
import type { Refusal } from './scalars.js';

type Issue = z.core.$ZodIssue;

/**
 * Turns what the schema found into faults.
 *
 * By convention of our schemas the message of an unknown key or of a union is the text of what is
 * allowed there, and a refusal travels in the parameters of a custom issue.
 */
export function reportIssues(issues: readonly Issue[], written: unknown, findings: Findings): void {
  for (const issue of issues) reportIssue(issue, issue.path, written, findings);
}

function reportIssue(issue: Issue, path: Path, written: unknown, findings: Findings): void {
  if (issue.code === 'unrecognized_keys') {
    for (const key of issue.keys) {
      const place = [...path, key];
      findings.fault('KEY_UNKNOWN', place, 'this key is not known here', issue.message);
    }
  } else if (issue.code === 'invalid_key') {
    for (const inner of issue.issues) reportIssue(inner, path, written, findings);
  } else if (issue.code === 'custom') {
    const refusal: Refusal | undefined = issue.params?.['refusal'];
    if (refusal === undefined) return;
    findings.fault(refusal.code, path, refusal.problem, refusal.allowed);
  } else if (valueAt(written, path) === undefined) {
    findings.fault('KEY_MISSING', path, 'a required key is missing', allowedBy(issue));
  } else if (issue.code === 'invalid_union') {
    reportUnion(issue, path, written, findings);
  } else {
    reportValue(issue, path, findings);
  }
}

/** Reports the one alternative of a union that the value was meant as, or the union itself. */
function reportUnion(
  issue: Issue & { code: 'invalid_union' },
  path: Path,
  written: unknown,
  findings: Findings,
): void {
  const meant = issue.errors.find((branch) => branch.every((inner) => !isWrongShape(inner)));
  if (meant === undefined || issue.errors.length === 0) {
    const choice = issue.errors.length === 0 || issue.errors.every((branch) => isChoice(branch[0]));
    if (choice) findings.fault('VALUE_CHOICE', path, 'not one of the choices', allowedBy(issue));
    else findings.fault('VALUE_TYPE', path, 'a value of the wrong type', allowedBy(issue));
    return;
  }
  for (const inner of meant) reportIssue(inner, [...path, ...inner.path], written, findings);
}

const isWrongShape = (issue: Issue): boolean =>
  issue.path.length === 0 && (issue.code === 'invalid_type' || issue.code === 'invalid_value');

const isChoice = (issue: Issue | undefined): boolean => issue?.code === 'invalid_value';

function reportValue(issue: Issue, path: Path, findings: Findings): void {
  const allowed = allowedBy(issue);
  if (issue.code === 'invalid_type') {
    const whole = String(issue.expected) === 'int';
    if (whole) findings.fault('VALUE_RANGE', path, 'not a whole number', allowed);
    else findings.fault('VALUE_TYPE', path, 'a value of the wrong type', allowed);
  } else if (issue.code === 'invalid_value') {
    if (path.length === 1 && path[0] === 'format') {
      findings.fault('FORMAT_UNKNOWN', path, 'a document of another kind or version', allowed);
    } else findings.fault('VALUE_CHOICE', path, 'not one of the choices', allowed);
  } else if (issue.code === 'too_small' || issue.code === 'too_big') {
    if (issue.origin === 'array') {
      findings.fault('LIST_LENGTH', path, 'a list of the wrong length', allowed);
    } else {
      const problem = issue.code === 'too_small' ? 'too small' : 'too large';
      findings.fault('VALUE_RANGE', path, problem, allowed);
    }
  } else {
    findings.fault('VALUE_TEXT', path, 'a text of the wrong shape', allowed);
  }
}

const typeWords: { readonly [type: string]: string } = {
  number: 'a finite number',
  int: 'a whole number',
  string: 'a text',
  boolean: 'true or false',
  array: 'a list',
  tuple: 'a list',
  object: 'an object',
  record: 'an object with a tag for each key',
};

/** What the schema would have accepted, in words. */
function allowedBy(issue: Issue): string {
  switch (issue.code) {
    case 'invalid_type':
      return typeWords[issue.expected] ?? issue.expected;
    case 'invalid_value':
      return issue.values.map((value) => JSON.stringify(value)).join(', ');
    case 'invalid_union': {
      const options = 'options' in issue && Array.isArray(issue.options) ? issue.options : [];
      return options.length === 0
        ? issue.message
        : options.map((o) => JSON.stringify(o)).join(', ');
    }
    case 'too_small':
      return boundWords(
        issue.origin,
        issue.inclusive === false ? 'more than' : 'at least',
        issue.minimum,
      );
    case 'too_big':
      return boundWords(
        issue.origin,
        issue.inclusive === false ? 'less than' : 'at most',
        issue.maximum,
      );
    default:
      return issue.message;
  }
}

function boundWords(origin: string, sense: string, bound: number | bigint): string {
  return origin === 'array' ? `${sense} ${bound} entries` : `${sense} ${bound}`;
}
