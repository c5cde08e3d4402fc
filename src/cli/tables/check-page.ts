import type { CheckReport } from '../../contract/index.js';
import { counted, duration, significant } from './figures.js';
import { interactionTable } from './interaction-table.js';
import type { Paper } from './paper.js';
import { facts, page, remarks, section } from './prose.js';

/** A check as people read it. */
export function checkPage(report: CheckReport, paper: Paper): string {
  const { paint } = paper;
  const warnings = report.warnings.map(
    ({ path, value, problem }) => `${path}: ${problem} (${value})`,
  );
  const table = interactionTable(report.interaction, paper);
  return page([
    `${paint.strong(report.unit.name)}\n${paint.good('This document is accepted.')}`,
    warnings.length === 0 ? null : section('Warnings', remarks(warnings, paper), paper),
    section('The unit', unitFacts(report, paper), paper),
    table === null ? null : section('Interaction at steady state', table, paper),
    determinantPart(report, paper),
    section('What will be run', runFacts(report, paper), paper),
    report.assumed.length === 0 ? null : section('Assumed', remarks(report.assumed, paper), paper),
  ]);
}

function unitFacts({ unit, loops, upsets }: CheckReport, paper: Paper): string {
  const tasks = [
    `${loops.retune} to retune`,
    loops.keep > 0 ? `${loops.keep} kept as they are` : '',
    loops.manual > 0 ? `${loops.manual} in manual` : '',
  ].filter((text) => text !== '');
  const kinds = [
    loops.averaging > 0 ? counted(loops.averaging, 'averaging level') : '',
    loops.driven > 0 ? `${loops.driven} driven by another loop` : '',
  ].filter((text) => text !== '');
  const size = [
    counted(unit.measurements, 'measurement'),
    counted(unit.actuators, 'actuator'),
    counted(unit.disturbances, 'disturbance'),
    counted(unit.responses, 'response'),
  ];
  if (unit.operatingPoints > 0) size.push(counted(unit.operatingPoints, 'further operating point'));
  const all = loops.retune + loops.keep + loops.manual;
  return facts(
    [
      ['loops', `${all}: ${tasks.join(', ')}${kinds.length > 0 ? `; ${kinds.join(', ')}` : ''}`],
      ['described by', size.join(', ')],
      [
        'upsets',
        [
          upsets.setpoint > 0 ? counted(upsets.setpoint, 'setpoint step') : '',
          upsets.load > 0 ? counted(upsets.load, 'load step') : '',
          upsets.disturbance > 0 ? counted(upsets.disturbance, 'disturbance step') : '',
        ]
          .filter((text) => text !== '')
          .join(', '),
      ],
    ],
    paper,
  );
}

function determinantPart({ determinant }: CheckReport, paper: Paper): string | null {
  const { models, signChanges } = determinant;
  if (signChanges === 0) return null;
  const words = `${signChanges} of ${models} models turn the sign of the steady-state determinant around: no tuning with integral action everywhere is stable on those and on the others alike. Narrow the gain spreads, or pair the loops otherwise.`;
  return section('Sign of the determinant', remarks([paper.paint.warn(words)], paper), paper);
}

function runFacts({ run, unit, reference, present, estimate }: CheckReport, paper: Paper): string {
  const time = (value: number): string => `${significant(value, 4)} ${unit.timeUnit}`;
  const steps =
    run.searchStep === run.step
      ? `${time(run.step)}, in the search too`
      : `${time(run.step)}; the search takes ${time(run.searchStep)}, its speeds within ${percent(run.searchError)} of these`;
  const scale =
    reference === 'none'
      ? 'and none that are stable are known: speed is a plain sum'
      : `so 1.00 is as fast as ${reference}`;
  const speed = {
    stable: "1.00 is as fast as today's settings",
    unstable: `today's settings are unstable, ${scale}`,
    incomplete: `not every loop has settings today, ${scale}`,
  }[present];
  const models = !run.exact
    ? `${run.models} for the search, fresh ones to verify`
    : `${run.models === 1 ? 'one' : run.models}, taken as exact`;
  return facts(
    [
      [
        'search',
        `${counted(run.settings, 'setting')} for ${counted(run.alternatives, 'alternative')}, ${run.effort} effort, seed ${run.seed}`,
      ],
      ['limits', `${run.limits}`],
      ['models', models],
      [
        'scan',
        run.slowestScan === undefined
          ? time(run.scan)
          : `on a grid of ${time(run.scan)}, the slowest every ${time(run.slowestScan)}`,
      ],
      ['horizon', `${time(run.horizon)} an upset`],
      ['step', steps],
      ['speed', speed],
      ['takes', `about ${roughly(estimate.seconds)} on ${counted(estimate.threads, 'thread')}`],
    ],
    paper,
  );
}

/** A guess with no more digits than it deserves. */
function roughly(seconds: number): string {
  if (seconds < 5) return 'a few seconds';
  if (seconds < 100) return `${Number(seconds.toPrecision(1))} s`;
  if (seconds < 5400) return `${Math.max(2, Math.round(seconds / 60))} min`;
  return duration(Math.round(seconds / 600) * 600);
}

/** A share in percent, to two digits. */
const percent = (share: number): string => `${Number((100 * share).toPrecision(2))} %`;
