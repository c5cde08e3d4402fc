import type { EvaluationDocument } from '../../contract/index.js';
import { limitInWords } from '../../contract/index.js';
import {
  acts,
  type EvaluationView,
  isExact,
  marginsTable,
  responsesTable,
} from './evaluation-loops.js';
import { counted, fixed, significant } from './figures.js';
import { grid } from './grid.js';
import { interactionTable } from './interaction-table.js';
import type { Paper } from './paper.js';
import { facts, page, remarks, section, wrapped } from './prose.js';
import { upsetMatrixTable } from './upset-matrix-table.js';

/** One scored tuning set as people read it. */
export function evaluationPage(view: EvaluationView, paper: Paper): string {
  const { evaluation, job, subject } = view;
  const { scored } = evaluation;
  const { paint } = paper;
  const scope = `${subject}, ${conditions(view)}`;
  const heading = `${paint.strong(job.unit.name)}\n${wrapped(scope, paper.width).join('\n')}`;
  if (!scored.nominal.unit.stable) {
    return page([heading, unstablePart(view, paper), noticesPart(evaluation, paper)]);
  }
  return page([
    heading,
    section('Result', summary(view, paper), paper),
    section('Loops: margins', marginsTable(view, paper), paper),
    section(
      'Loops: response to the upsets',
      `${responsesTable(view, paper)}\n${responsesNote(view, paper)}`,
      paper,
    ),
    upsetsPart(view, paper),
    section('Limits', limitsPart(view, paper), paper),
    section('Unit', unitPart(view, paper), paper),
    view.assumed.length === 0 ? null : section('Assumed', remarks(view.assumed, paper), paper),
    noticesPart(evaluation, paper),
  ]);
}

function conditions({ evaluation, job, models: count }: EvaluationView): string {
  const { horizon, step, timeUnit } = evaluation;
  const models = isExact(job)
    ? 'the unit taken as exact'
    : `${counted(count, 'model')} of the unit`;
  return `over ${significant(horizon)} ${timeUnit} in steps of ${significant(step)} ${timeUnit}, ${models}`;
}

function unstablePart(view: EvaluationView, paper: Paper): string {
  const lines = [
    paper.paint.bad('These settings are unstable on the nominal unit.'),
    'There are no margins, responses or objectives to show: what grows has no figures.',
  ];
  const other = view.evaluation.reference;
  if (other !== 'present' && other !== 'none')
    lines.push(`A speed of 1.00 would be that of ${other}.`);
  return lines.join('\n');
}

function summary({ evaluation, job }: EvaluationView, paper: Paper): string {
  const { scored, reference } = evaluation;
  const unstable = scored.worst.unit.unstableModels ?? 0;
  const than = reference === 'present' ? 'today' : reference;
  const scale =
    reference === 'none'
      ? 'a plain sum, since no stable settings are known; less is faster'
      : `where 1.00 is as fast as ${than} and less is faster`;
  const list: [string, string][] = [];
  if (!scored.stable) {
    const words = `unstable on ${counted(unstable, 'model')} of the set, though stable on the nominal unit`;
    list.push(['stable', paper.paint.bad(words)]);
  } else {
    const ms = fixed(scored.objectives.robustness, 2);
    const where = isExact(job) ? 'of a retuned loop' : 'of a retuned loop on any model';
    list.push(['robustness', `${ms}, the largest peak sensitivity Ms ${where}`]);
  }
  const speed = `${fixed(scored.nominal.unit.speed, 2)}, ${scale}`;
  const worst = scored.worst.unit.speed;
  const onWorst = isExact(job) || worst === null ? '' : `; ${fixed(worst, 2)} on the worst model`;
  list.unshift(['speed', `${speed}${onWorst}`]);
  const acted = scored.nominal.unit.speedWithActuators ?? null;
  if (acted !== null) {
    list.splice(1, 0, ['', `${fixed(acted, 2)} with dead band and resolution of the actuators`]);
  }
  return facts(list, paper);
}

function responsesNote(view: EvaluationView, paper: Paper): string {
  const { job } = view;
  const { setpoint, load, disturbance } = job.search.upsetWeights;
  const text =
    `IAE is the sum over all upsets, each by its weight (setpoint ${significant(setpoint)}, load ` +
    `${significant(load)}, disturbance ${significant(disturbance)}), in PV unit x ${job.unit.timeUnit}.` +
    (acts(view)
      ? ' It and the speed made of it are without dead band and resolution of the actuators; everything else is with them.'
      : '');
  const lines = wrapped(text, Math.max(30, paper.width - 2)).map((line) => `  ${line}`);
  return paper.paint.faint(lines.join('\n'));
}

function limitsPart({ verdicts, evaluation }: EvaluationView, paper: Paper): string {
  const { paint } = paper;
  if (verdicts.length === 0) return '  none';
  const judged = verdicts.filter(({ holds }) => holds !== null);
  const broken = judged.filter(({ holds }) => holds === false);
  const unknown = verdicts.length - judged.length;
  const lines: string[] = [];
  if (unknown > 0) {
    const why = evaluation.scored.stable ? '' : ', which are for stable models alone';
    lines.push(`  ${counted(unknown, 'limit')} not judged${why}`);
  }
  if (broken.length === 0) {
    if (judged.length > 0) {
      lines.push(
        `  ${paint.good(judged.length === 1 ? 'the one limit holds' : `all ${judged.length} hold`)}`,
      );
    }
    return lines.join('\n');
  }
  lines.push(`  ${paint.bad(`${broken.length} of ${judged.length} broken`)}`);
  const columns = [
    { head: '' },
    { head: 'limit' },
    { head: 'asked', lean: 'right' },
    { head: 'reached', lean: 'right' },
    { head: '' },
  ] as const;
  const rows = broken.map((verdict) => [
    verdict.loop ?? 'unit',
    limitInWords(verdict.limit),
    verdict.asked,
    verdict.reached,
    [verdict.nominal ? 'nominal' : '', verdict.stated ? '' : 'assumed'].filter(Boolean).join(', '),
  ]);
  lines.push(grid(columns, rows, paper));
  return lines.join('\n');
}

function upsetsPart({ evaluation }: EvaluationView, paper: Paper): string | null {
  const table = upsetMatrixTable(evaluation.scored.nominal, paper);
  return table === null ? null : section('Loops: who disturbs whom', table, paper);
}

function unitPart({ evaluation }: EvaluationView, paper: Paper): string {
  const { nominal, worst } = evaluation.scored;
  const both = (key: 'peakSingularValueS' | 'peakSingularValueT'): string => {
    const text = fixed(nominal.unit[key], 2);
    const other = worst.unit[key];
    return other === null || other === nominal.unit[key]
      ? text
      : `${text}, worst ${fixed(other, 2)}`;
  };
  const needed = Object.entries(nominal.loops)
    .filter(([, { stableInManual }]) => stableInManual === false)
    .map(([tag]) => tag);
  const manual =
    needed.length === 0
      ? 'the rest is stable with any one loop in manual'
      : paper.paint.warn(`must not be in manual: ${needed.join(', ')}`);
  const table = interactionTable(nominal.unit, paper);
  const list = facts(
    [
      ['peak singular value of S', both('peakSingularValueS')],
      ['peak singular value of T', both('peakSingularValueT')],
      ['loops in manual', manual],
    ],
    paper,
  );
  return table === null ? list : `${list}\n${table}`;
}

function noticesPart({ warnings }: EvaluationDocument, paper: Paper): string | null {
  if (warnings.length === 0) return null;
  const texts = warnings.map(({ path, value, problem }) => `${path}: ${problem} (${value})`);
  return section('Warnings', remarks(texts, paper), paper);
}
