import type { Loose } from '../documents.js';
import { change, type FaultyDocument, lag, link, model, rational, set } from './faulty-document.js';

const later = /not yet available|ring.*: /;

function ring(job: Loose, one: object, other: object): void {
  job.unit.responses.push(link('TI-110', 'LI-120', one), link('LI-120', 'TI-110', other));
  job.unit.responses.splice(2, 1, link('LV-120', 'LI-120', lag));
  job.unit.responses.splice(5, 1);
  job.unit.operatingPoints = [];
}

/** Documents whose parts do not belong together, by fault code. */
export const faultyRelations = {
  TAG_INVALID: [
    set('33 characters', 'loops[3].tag', 'T'.repeat(33), /too long/),
    set('no character', 'loops[3].tag', '', /empty/),
    set('a blank before', 'loops[3].tag', ' TC', /blank/),
    set('an escape sequence', 'loops[3].tag', '\u001b[2J', /\\u\{1b\}\[2J/),
    set('text turned round', 'loops[3].tag', 'TC\u202e', /\\u\{202e\}/),
    set('a property of every object', 'loops[3].tag', 'constructor', /keep for themselves/),
    set('a prototype', 'loops[3].tag', '__proto__', /keep for themselves/),
  ],
  TAG_DUPLICATE: [
    set('two measurements', 'unit.measurements[2].tag', 'FI-111'),
    set('actuator and measurement', 'unit.actuators[1].tag', 'PI-130'),
    set('disturbance and actuator', 'unit.disturbances[0].tag', 'LV-120'),
    set('two loops', 'loops[2].tag', 'TC-110'),
    change('two operating points', 'unit.operatingPoints[1].name', (job) => {
      job.unit.operatingPoints.push(job.unit.operatingPoints[0]);
    }),
  ],
  REFERENCE_UNKNOWN: [
    set('from', 'unit.responses[0].from', 'FV-999', /"FV-999"/),
    set('to an actuator', 'unit.responses[0].to', 'LV-120', /measurement/),
    change(
      'a setpoint',
      'unit.responses[3].from.setpointOf',
      (job) => (job.unit.responses[3].from = { setpointOf: 'XC-1' }),
    ),
    set('a measurement', 'loops[3].measurement', 'PI-999'),
    set('an actuator', 'loops[3].drives', 'FEED'),
    change(
      'an inner loop',
      'loops[0].drives.loop',
      (job) => (job.loops[0].drives = { loop: 'FC-999' }),
    ),
    change(
      'a feedforward',
      'loops[0].feedforward[0].from',
      (job) => (job.loops[0].feedforward = [{ from: 'RAIN', gain: 1 }]),
    ),
    change('its own output', 'loops[0].feedforward[0].from.outputOf', (job) => {
      job.loops[0].feedforward = [{ from: { outputOf: 'TC-110' }, gain: 1 }];
    }),
  ],
  RANGE_ORDER: [
    set('a measurement', 'unit.measurements[0].high', 40, /more than the low end, 40/),
    set('an actuator', 'unit.actuators[1].high', -1),
    set('bounds', 'loops[0].bounds.gain', [3, 2]),
    set('an output range', 'loops[1].outputHigh', 5),
  ],
  OUTSIDE_RANGE: [
    set('a measurement', 'unit.measurements[1].at', 21, /0 to 20/),
    set('an actuator', 'unit.actuators[0].at', -3),
    set('an output limit', 'loops[1].outputHigh', 101, /0 to 100/),
    set('a dead band', 'unit.actuators[0].deadband', 100, /less than the range, 100/),
    set('a resolution', 'unit.actuators[1].resolution', 150, /never move/),
    set('a setpoint limit', 'loops[0].outputHigh', 21, /0 to 20/),
    set('a limit above the position', 'loops[1].outputLow', 50, /today's position, 46/),
    set('a limit below the position', 'loops[1].outputHigh', 45),
  ],
  MODEL_INCONSISTENT: [
    change(
      'lags and a swing',
      'unit.responses[1].model',
      (job) => (job.unit.responses[1].model.damping = 1),
      /both/,
    ),
    change(
      'half a swing',
      'unit.responses[3].model',
      (job) => delete job.unit.responses[3].model.period,
      /neither/,
    ),
    change('a leading zero', 'unit.responses[4].model.denominator', (job) =>
      model(job, 4, rational([1], [0, 1])),
    ),
    change('a slope of nothing that goes on', 'unit.responses[4].model.values', (job) =>
      model(job, 4, { kind: 'step-response', interval: 1, values: [-1, -1], integrating: true }),
    ),
  ],
  RESPONSE_DUPLICATE: [
    change(
      'a pair twice',
      'unit.responses[6]',
      (job) => {
        job.unit.responses.push(job.unit.responses[0]);
      },
      /FV-111 -> FI-111/,
    ),
  ],
  RESPONSE_SELF: [
    change('itself', 'unit.responses[1]', (job) => (job.unit.responses[1].from = 'TI-110')),
  ],
  RESPONSE_IMPROPER: [
    change('a numerator of higher order', 'unit.responses[4].model.numerator', (job) =>
      model(job, 4, rational([-1, 1, 1], [2, 1])),
    ),
  ],
  RESPONSE_ALGEBRAIC: [
    change('as much lead as lag', 'unit.responses[4].model', (job) =>
      model(job, 4, rational([-1, -1], [2, 1])),
    ),
    change('an integrator with a bare lead', 'unit.responses[2].model', (job) =>
      model(job, 2, { kind: 'integrating', rate: -1, lead: 2 }),
    ),
    change('from a setpoint', 'unit.responses[3].model', (job) =>
      model(job, 3, rational([1, 1], [2, 1])),
    ),
  ],
  RESPONSE_ZERO: [
    set('an own gain', 'unit.responses[0].model.gain', 0, /FC-111 moves its own/),
    set('an own rate', 'unit.responses[2].model.rate', 0, /LC-120/),
    change('a numerator of zeros', 'unit.responses[4].model.numerator', (job) =>
      model(job, 4, rational([0, 0], [1, 1])),
    ),
  ],
  RESPONSE_RING: [
    change(
      'two gains in a ring',
      'unit.responses[6]',
      (job) => ring(job, rational([1], [2]), rational([2], [1])),
      /TI-110 -> LI-120 -> TI-110/,
    ),
    change(
      'a lag and a gain in a ring',
      'unit.responses[6]',
      (job) => ring(job, lag, rational([2], [1])),
      /hold both ways/,
    ),
  ],
  RESPONSE_MISSING: [
    change(
      'an actuator',
      'loops[1]',
      (job) => {
        job.unit.responses[0].from = 'LV-120';
        job.unit.operatingPoints = [];
      },
      /from FV-111 to FI-111/,
    ),
    change(
      'an inner loop',
      'loops[0]',
      (job) => {
        job.unit.responses.splice(1, 1);
        job.unit.operatingPoints = [];
      },
      /from loop FC-111 to TI-110/,
    ),
    change(
      'an inner loop that goes by its measurement alone',
      'loops[1].controller.setpointWeight',
      (job) => {
        Object.assign(job.loops[1].controller, { terms: 'P', setpointWeight: 0 });
        job.loops[1].present.integral = 0;
      },
      /setpoint, which TC-110 drives/,
    ),
  ],
  SETPOINT_SOURCE: [
    change(
      'a retuned loop',
      'unit.responses[3].from.setpointOf',
      (job) => (job.loops[3].task = 'retune'),
      /keep/,
    ),
    change(
      'a loop in manual',
      'unit.responses[3].from.setpointOf',
      (job) => (job.loops[3].task = 'manual'),
    ),
  ],
  POINT_MISMATCH: [
    change(
      'a pair too few',
      'unit.operatingPoints[0].responses',
      (job) => job.unit.operatingPoints[0].responses.pop(),
      /FEED -> LI-120/,
    ),
    change(
      'a pair too many',
      'unit.operatingPoints[0].responses[6]',
      (job) => {
        job.unit.operatingPoints[0].responses.push(link('FEED', 'PI-130', lag));
      },
      /FEED -> PI-130/,
    ),
  ],
  FEEDFORWARD_IMPROPER: [
    change(
      'a lead alone',
      'loops[0].feedforward[0].lag',
      (job) => (job.loops[0].feedforward = [{ from: 'FEED', gain: 1, lead: 2 }]),
      /a lead of 0/,
    ),
  ],
  FEEDFORWARD_RING: [
    change('two loops', 'loops[0].feedforward[0]', (job) => {
      job.loops[0].feedforward = [{ from: { outputOf: 'PC-130' }, gain: 1 }];
      job.loops[3].feedforward = [{ from: { outputOf: 'TC-110' }, gain: 1, lead: 1, lag: 2 }];
    }),
    change('three loops', 'loops[0].feedforward[0]', (job) => {
      job.loops[0].feedforward = [{ from: { outputOf: 'PC-130' }, gain: 1 }];
      job.loops[3].feedforward = [{ from: { outputOf: 'LC-120' }, gain: 1 }];
      job.loops[2].feedforward = [{ from: { outputOf: 'FC-111' }, gain: 1 }];
    }),
    change('back up a cascade', 'loops[0].feedforward[0]', (job) => {
      job.loops[0].feedforward = [{ from: { outputOf: 'FC-111' }, gain: 1 }];
    }),
  ],
  CASCADE_RING: [
    change(
      'itself',
      'loops[1].drives.loop',
      (job) => (job.loops[1].drives = { loop: 'FC-111' }),
      /FC-111 -> FC-111/,
    ),
    change(
      'two loops',
      'loops[1].drives.loop',
      (job) => (job.loops[1].drives = { loop: 'TC-110' }),
      /TC-110 -> FC-111 -> TC-110/,
    ),
  ],
  CASCADE_BROKEN: [
    change(
      'an inner loop in manual',
      'loops[0].task',
      (job) => (job.loops[1].task = 'manual'),
      /FC-111, is in manual/,
    ),
  ],
  DRIVEN_TWICE: [
    set('an actuator', 'loops[2].drives', 'FV-111', /driven by FC-111/),
    set('an inner loop', 'loops[2].drives', { loop: 'FC-111' }, /driven by TC-110/),
  ],
  CONTROLLED_TWICE: [
    set('a measurement', 'loops[3].measurement', 'LI-120', /controlled by LC-120/),
  ],
  NOTHING_TO_RETUNE: [
    change('all kept', 'loops', (job) => {
      for (const loop of job.loops) loop.task = 'keep';
    }),
  ],
  PRESENT_MISSING: [set('a kept loop', 'loops[3].present', undefined, /keep/)],
  SETTING_MISSING: [set('an integral', 'loops[1].present.integral', undefined, /PI controller/)],
  SETTING_SIGN: [
    set('a gain of zero', 'loops[1].present.gain', 0),
    set('a signed gain beside an action', 'loops[2].present.gain', -1, /direct/),
    set('an integral of zero', 'loops[1].present.integral', 0),
  ],
  SETTING_UNUSED: [
    change(
      'a bound on the gain in I',
      'loops[1].bounds.gain',
      (job) => {
        job.loops[1].controller.terms = 'I';
        job.loops[1].bounds = { gain: [0.1, 1] };
      },
      /only scales its integral/,
    ),
    set('a derivative in PI', 'loops[1].present.derivative', 1),
    change(
      'an integral in P',
      'loops[1].present.integral',
      (job) => (job.loops[1].controller.terms = 'P'),
    ),
    change(
      'a bound on a derivative in PI: it would silently do nothing where its author expects it to',
      'loops[1].bounds.derivative',
      (job) => (job.loops[1].bounds = { derivative: [0, 5] }),
      /FC-111: a PI controller has no derivative to bound; found \[0, 5\]/,
    ),
    change(
      'a bound on an integral in P, though the loop is kept and the bound idle for now',
      'loops[3].bounds.integral',
      (job) => {
        job.loops[3].controller.terms = 'P';
        job.loops[3].present.integral = 0;
        job.loops[3].bounds = { integral: [1, 2] };
      },
    ),
  ],
  BOUNDS_APART: [
    set(
      'bounds above what may be reached',
      'loops[0].bounds.gain',
      [5, 10],
      /5 to 10, lie apart from 0\.275 to 4\.4, which maxChange 4 leaves of today's gain of 1\.1/,
    ),
    set('bounds below what may be reached', 'loops[0].bounds.derivative', [0, 14]),
    change(
      'the size of a gain below zero',
      'loops[3].bounds.gain',
      (job) => {
        job.unit.responses.splice(3, 1);
        job.unit.operatingPoints = [];
        job.loops[3] = {
          ...job.loops[3],
          task: 'retune',
          maxChange: 2,
          bounds: { gain: [10, 59] },
        };
      },
      /60 to 240.*today's gain of 120/,
    ),
    change(
      'no change at all',
      'loops[1].bounds.integral',
      (job) => Object.assign(job.loops[1], { maxChange: 1, bounds: { integral: [0.31, 1] } }),
      /0\.3 to 0\.3/,
    ),
    change(
      'a filter, taken as one scan beside derivative',
      'loops[0].bounds.filter',
      (job) => {
        job.loops[0].present.filter = 0.1;
        job.loops[0].bounds = { filter: [0.1, 0.2] };
      },
      /0\.25 to 4/,
    ),
  ],
  TERMS_UNSUITED: [
    set('derivative alone', 'loops[1].controller.terms', 'D', /holds any constant error/),
    set('integral and derivative', 'loops[1].controller.terms', 'ID'),
    change(
      'PD on a flow',
      'loops[1].controller.terms',
      (job) => {
        job.loops[1].controller.terms = 'PD';
        job.loops[1].present.integral = 0;
      },
      /process itself integrates/,
    ),
  ],
  BAND_MISSING: [set('averaging', 'loops[2].limits.levelBand', undefined)],
  BAND_UNSUITED: [set('tight', 'loops[0].limits.levelBand', 5, /averaging/)],
  LIMIT_DIRECTION: [
    set('a least overshoot', 'loops[0].limits.overshoot', { min: 5 }, /wrong side/),
    set('a largest margin', 'loops[0].limits.phaseMargin', { max: 60 }, /"min": number/),
    set('of the unit', 'unitLimits.peakSingularValueT', { min: 1 }),
  ],
  OBJECTIVES_INCOMPLETE: [
    set('speed alone', 'search.objectives', ['speed']),
    set('speed twice', 'search.objectives', ['speed', 'robustness', 'speed']),
  ],
  UPSET_WEIGHTS: [
    change('all zero', 'search.upsetWeights', (job) => {
      job.search.upsetWeights = { setpoint: 0, load: 0, disturbance: 0 };
    }),
  ],
  SCANS_UNRELATED: [
    set('1.37 s beside 1 s', 'loops[3].controller.scan', 1.37, /1\.37 s.*1 s/),
    set('997 s beside 1 s', 'loops[3].controller.scan', 997, /every 997 steps.*at most 720/),
    change(
      'scans that do not divide one another, many of them in a period',
      'loops[1].controller.scan',
      (job) => {
        for (const [i, scan] of [1.9, 3.7, 1.9, 3.7].entries()) job.loops[i].controller.scan = scan;
      },
      /every 703 steps.*112 times.*at most 720 steps and 96/,
    ),
  ],
  TOO_MANY_SCANS: [
    change(
      'a feedforward',
      'loops[0].feedforward[0].deadTime',
      (job) => (job.loops[0].feedforward = [{ from: 'FEED', gain: 1, deadTime: 1e6 }]),
    ),
    set('a horizon', 'unit.horizon', 4000, /4000 min is 240000 scans.*200000 scans/),
    set('a dead time', 'unit.responses[0].model.deadTime', 4000),
    change('a step response', 'unit.responses[4].model.interval', (job) =>
      model(job, 4, { kind: 'step-response', interval: 2000, values: [-1, -2] }),
    ),
  ],
  HORIZON_SHORT: [set('nine scans', 'unit.horizon', 0.15, /at least 0\.166/)],
  NOT_YET_AVAILABLE: [
    change(
      'effort',
      'search.objectives',
      (job) => (job.search.objectives = ['speed', 'robustness', 'effort']),
      later,
    ),
    change('a time budget', 'search.timeBudget', (job) => (job.search.timeBudget = 600), later),
  ],
} satisfies Record<string, readonly FaultyDocument[]>;
