import type { Draft, Entry, Listed } from './draft.js';
import type { Findings } from './findings.js';
import { excessOrder, isInstant, isZero, lastSlope } from './model-facts.js';
import { pairText } from './response-graph.js';
import type { ResponseDocument, ResponseModel } from './responses.js';
import { ringsOf } from './rings.js';

/** Every response, of the unit and of each operating point, joins two known points and is a process. */
export function checkResponses(draft: Draft, findings: Findings): void {
  for (const list of [draft.responses, ...draft.points.map((point) => point.responses)]) {
    checkPairs(list, findings);
    for (const response of list.entries) {
      checkEnds(response, draft, findings);
      if (!response.lost.has('model')) checkModel(response, draft, findings);
    }
  }
  checkRings(draft, findings);
  checkPoints(draft, findings);
}

function checkPairs(list: Listed<ResponseDocument>, findings: Findings): void {
  const seen = new Set<string>();
  for (const { path, value } of list.entries) {
    const pair = pairText(value);
    if (seen.has(pair)) {
      findings.fault('RESPONSE_DUPLICATE', path, `a second response ${pair}`, 'each pair once');
    }
    seen.add(pair);
  }
}

function checkEnds(response: Entry<ResponseDocument>, draft: Draft, findings: Findings): void {
  const { path, value } = response;
  const { tags } = draft;
  const { from } = value;
  if (!tags.measurements.has(value.to)) {
    const allowed = 'the tag of a measurement';
    findings.fault('REFERENCE_UNKNOWN', [...path, 'to'], 'no measurement has this tag', allowed);
  }
  if (typeof from !== 'string') {
    checkSetpointSource(response, from.setpointOf, draft, findings);
  } else if (from === value.to) {
    const allowed = 'a response between two different points';
    findings.fault('RESPONSE_SELF', path, 'a response from a measurement to itself', allowed);
  } else if (![tags.measurements, tags.actuators, tags.disturbances].some((set) => set.has(from))) {
    const problem = 'no actuator, disturbance or measurement has this tag';
    const allowed = 'the tag of an actuator, disturbance or measurement';
    findings.fault('REFERENCE_UNKNOWN', [...path, 'from'], problem, allowed);
  }
}

function checkSetpointSource(
  response: Entry<ResponseDocument>,
  tag: string,
  draft: Draft,
  findings: Findings,
): void {
  const place = [...response.path, 'from', 'setpointOf'];
  const loop = draft.loops.entries.find(({ value }) => value.tag === tag);
  if (!draft.tags.loops.has(tag)) {
    findings.fault('REFERENCE_UNKNOWN', place, 'no loop has this tag', 'the tag of a loop');
  } else if (loop !== undefined && !loop.lost.has('task') && loop.value.task !== 'keep') {
    const problem = `identified through a loop whose task is ${loop.value.task}`;
    findings.fault('SETPOINT_SOURCE', place, problem, 'a loop whose task is keep');
  }
}

function checkModel(response: Entry<ResponseDocument>, draft: Draft, findings: Findings): void {
  const path = [...response.path, 'model'];
  const { model, from } = response.value;
  const place = [...path, 'numerator'];
  if (model.kind === 'second-order') checkSecondOrder(model, path, findings);
  if (model.kind === 'step-response' && model.integrating && lastSlope(model.values) === 0) {
    const problem = 'the last two values are equal, so there is no slope that could go on';
    const allowed = 'a last value other than the one before, or "integrating": false';
    findings.fault('MODEL_INCONSISTENT', [...path, 'values'], problem, allowed);
  }
  if (model.kind === 'transfer-function') {
    if (model.denominator[0] === 0) {
      const problem = 'the leading coefficient of the denominator is zero';
      findings.fault(
        'MODEL_INCONSISTENT',
        [...path, 'denominator'],
        problem,
        'a leading coefficient other than 0',
      );
      return;
    }
    if (isZero(model)) {
      const problem = 'every coefficient of the numerator is zero';
      findings.fault('RESPONSE_ZERO', place, problem, 'at least one coefficient other than 0');
    }
  }
  const fromController = typeof from !== 'string' || draft.tags.actuators.has(from);
  if (excessOrder(model) > 0) {
    const allowed = 'a numerator of at most the order of the denominator';
    findings.fault('RESPONSE_IMPROPER', place, 'the numerator outgrows the denominator', allowed);
  } else if (fromController && isInstant(model)) {
    const problem = 'the measurement would jump with the output: an algebraic loop';
    findings.fault(
      'RESPONSE_ALGEBRAIC',
      path,
      problem,
      'a lag more than leads, or a dead time above 0',
    );
  }
}

function checkSecondOrder(
  model: ResponseModel & { kind: 'second-order' },
  path: readonly PropertyKey[],
  findings: Findings,
): void {
  const lags = model.timeConstants !== undefined;
  const swing = [model.period, model.damping].filter((part) => part !== undefined).length;
  if ((lags && swing === 0) || (!lags && swing === 2)) return;
  const problem = lags
    ? 'both time constants and a period or damping are stated'
    : 'neither two time constants nor both period and damping are stated';
  const allowed = 'either timeConstants [T1, T2], or period and damping';
  findings.fault('MODEL_INCONSISTENT', path, problem, allowed);
}

/**
 * Refuses rings. Where each of two measurements answers the other, the response of either to an
 * actuator holds both ways already; with dead time in the ring nothing finite samples it exactly.
 */
function checkRings(draft: Draft, findings: Findings): void {
  const { measurements } = draft.tags;
  for (const list of [draft.responses, ...draft.points.map((point) => point.responses)]) {
    const between = new Map<string, Entry<ResponseDocument>>();
    const next = new Map<string, string[]>();
    for (const entry of list.entries) {
      const { from, to } = entry.value;
      if (typeof from !== 'string' || from === to || !measurements.has(from)) continue;
      between.set(`${from}\n${to}`, entry);
      next.set(from, [...(next.get(from) ?? []), to]);
    }
    for (const ring of ringsOf(next.keys(), (tag) => next.get(tag) ?? [])) {
      const links = ring.map((tag, at) => between.get(`${tag}\n${ring[(at + 1) % ring.length]}`));
      const closing = links.at(-1);
      if (closing === undefined) continue;
      const problem = `the measurements respond in a ring: ${[...ring, ring[0]].join(' -> ')}`;
      if (links.every((link) => link !== undefined && isInstant(link.value.model))) {
        findings.fault(
          'RESPONSE_RING',
          closing.path,
          `${problem}, without lag or dead time`,
          'no ring',
        );
      } else {
        const allowed =
          'the responses of these measurements to actuators and disturbances, as a step test shows them: ' +
          'they hold both ways';
        findings.fault('RESPONSE_RING', closing.path, problem, allowed);
      }
    }
  }
}

/** An operating point has other models for the same pairs, no fewer and no more. */
function checkPoints(draft: Draft, findings: Findings): void {
  if (!draft.responses.complete) return;
  const wanted = new Set(draft.responses.entries.map(({ value }) => pairText(value)));
  for (const { responses } of draft.points) {
    const has = new Set(responses.entries.map(({ value }) => pairText(value)));
    for (const { path, value } of responses.entries) {
      if (wanted.has(pairText(value))) continue;
      const problem = `the unit has no response ${pairText(value)}`;
      findings.fault('POINT_MISMATCH', path, problem, 'the pairs of unit.responses');
    }
    const missing = [...wanted].filter((pair) => !has.has(pair));
    if (missing.length === 0 || !responses.complete) continue;
    const names = missing.slice(0, 5).join(', ') + (missing.length > 5 ? ', …' : '');
    const problem = `responses are missing: ${names}`;
    findings.fault('POINT_MISMATCH', responses.path, problem, 'the pairs of unit.responses');
  }
}
