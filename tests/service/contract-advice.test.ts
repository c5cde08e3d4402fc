import { describe, expect, it } from 'vitest';
import { readJob, scanSeconds } from '../../src/contract/index.js';
import { acceptedJob, exampleWith, type Loose } from '../documents.js';

function warningsOf(change: (job: Loose) => void): readonly string[] {
  const read = readJob(JSON.stringify(exampleWith(change)));
  if (!read.ok) throw new Error(JSON.stringify(read.faults));
  return read.warnings.map((warning) => `${warning.path}: ${warning.problem}`);
}

const withoutPoints = (job: Loose) => {
  job.unit.operatingPoints = [];
};

describe('An accepted job', () => {
  it.each([
    [
      'a flow loop by its response',
      'loops[1].present.gain',
      (job: Loose) => (job.loops[1].present.gain *= -1),
    ],
    [
      'a level loop by its named action',
      'loops[2].action',
      (job: Loose) => (job.loops[2].action = 'reverse'),
    ],
    [
      'an outer loop by the response from its inner measurement',
      'loops[0].present.gain',
      (job: Loose) => (job.loops[0].present.gain *= -1),
    ],
    [
      'a loop on a rational response',
      'loops[3].present.gain',
      (job: Loose) => (job.loops[3].present.gain *= -1),
    ],
    [
      'an outer loop by its actuator, where the inner response is negative too',
      'loops[0].present.gain',
      (job: Loose) => {
        withoutPoints(job);
        job.unit.responses[1].from = 'FV-111';
        job.unit.responses[0].model.gain *= -1;
        job.loops[1].present.gain *= -1;
      },
    ],
    [
      'a loop whose output passes another measurement, which falls as it rises',
      'loops[3].present.gain',
      (job: Loose) => {
        withoutPoints(job);
        const model = { kind: 'first-order', gain: -1, timeConstant: 1 };
        job.unit.measurements.push({ tag: 'FI-131', unit: 't/h', low: 0, high: 9 });
        job.unit.responses[4] = { from: 'PV-130', to: 'FI-131', model };
        job.unit.responses.push({ from: 'FI-131', to: 'PI-130', model: { ...model, gain: 1 } });
        job.loops[3].present.gain *= -1;
      },
    ],
  ])('is warned of a gain that acts against its response: %s', (_, path, change) => {
    const warnings = warningsOf(change);
    expect(warnings).toHaveLength(1);
    expect(warnings[0]).toContain(`${path}: `);
    expect(warnings[0]).toMatch(/against its response/);
  });

  it('is not warned of a sign where two ways lead from output to measurement', () => {
    const warnings = warningsOf((job) => {
      withoutPoints(job);
      const model = { kind: 'first-order', gain: -1, timeConstant: 1 };
      job.unit.responses.push({ from: 'FV-111', to: 'TI-110', model });
      job.unit.responses.push({ from: 'FI-111', to: 'PI-130', model });
      job.unit.responses.push({ from: 'PV-130', to: 'FI-111', model });
      job.loops[3].present.gain *= -1;
    });
    expect(warnings).toEqual([]);
  });

  it('has scans within one percent of each other made one, and is told', () => {
    const document = exampleWith((job) => {
      job.loops[0].controller.scan = 1.008;
      job.loops[3].controller = { ...job.loops[3].controller, scan: 1.004 / 60, scanUnit: 'min' };
    });
    const job = acceptedJob(document);
    expect(job.loops.map((loop) => scanSeconds(loop.controller))).toEqual([1, 1, 1, 1]);
    const read = readJob(JSON.stringify(document));
    expect(read.ok ? read.warnings.map(({ path }) => path) : []).toEqual([
      'loops[0].controller.scan',
      'loops[3].controller.scan',
    ]);
  });

  it('is not warned of scans that are equal in different units', () => {
    const warnings = warningsOf((job) => {
      job.loops[0].controller = { ...job.loops[0].controller, scan: 0.05, scanUnit: 'min' };
      for (const loop of job.loops.slice(1)) loop.controller.scan = 3;
    });
    expect(warnings).toEqual([]);
  });

  it('is warned of a derivative whose filter is shorter than a scan', () => {
    expect(warningsOf((job) => (job.loops[0].present.filter = 0.5))).toEqual([
      expect.stringMatching(/^loops\[0\]\.present\.filter: .*one scan/),
    ]);
  });

  it('is warned of a load step that an outer loop cannot have', () => {
    expect(warningsOf((job) => (job.loops[0].loadStep = 1))).toEqual([
      expect.stringMatching(/^loops\[0\]\.loadStep: /),
    ]);
  });

  it('is warned of integral action alone on a level', () => {
    const warnings = warningsOf((job) => {
      const loop = job.loops[2];
      loop.controller = { ...loop.controller, terms: 'I' };
    });
    expect(warnings).toEqual([expect.stringMatching(/^loops\[2\]\.controller\.terms: .*damps/)]);
  });

  it('is warned of a step response that was broken off before it came to rest', () => {
    const withValues = (values: number[], integrating = false): readonly string[] =>
      warningsOf((job) => {
        withoutPoints(job);
        const model = { kind: 'step-response', interval: 1, values, integrating };
        job.unit.responses[4] = { ...job.unit.responses[4], model };
      });
    expect(withValues([-1, -2, -3])).toEqual([
      expect.stringMatching(/^unit\.responses\[4\]\.model\.values: .*the gain/),
    ]);
    expect(withValues([-1, -2, -3], true)).toEqual([]);
    expect(withValues([-1, -2, -2.9, -3, -3])).toEqual([]);
  });
});

describe('A loop to be brought into service', () => {
  it('is one to retune without present settings: no fault, but said plainly', () => {
    const [warning = '', ...others] = warningsOf((job) => delete job.loops[1].present);
    expect(others).toEqual([]);
    expect(warning).toMatch(/^loops\[1\]\.present: /);
    for (const words of [
      /manual/,
      /starts from a published rule/,
      /no present tuning to compare/,
    ]) {
      expect(warning).toMatch(words);
    }
  });

  it('may have any bounds, for there is no present setting that they could lie apart from', () => {
    const bounds = { gain: [1e-6, 2e-6], integral: [1e5, 2e5], filter: [7, 8] };
    const told = warningsOf((job) => {
      delete job.loops[1].present;
      Object.assign(job.loops[1], { bounds, maxChange: 1 });
    });
    expect(told).toHaveLength(1);
  });

  it('has its action judged where it is named', () => {
    const told = warningsOf((job) => {
      delete job.loops[2].present;
      job.loops[2].action = 'reverse';
    });
    expect(told).toEqual([
      expect.stringMatching(/^loops\[2\]\.action: .*against its response/),
      expect.stringMatching(/^loops\[2\]\.present: /),
    ]);
  });

  it('is no matter of a loop that stays in manual', () => {
    const told = warningsOf((job) => {
      job.loops.push({ ...job.loops[2], tag: 'LC-121', task: 'manual' });
      delete job.loops[4].present;
    });
    expect(told).toEqual([]);
  });
});

describe('What a release can compute', () => {
  it.each([
    [
      'series and parallel forms',
      (job: Loose) => {
        job.loops[0].controller.form = 'series';
        job.loops[1].controller.form = 'parallel';
      },
    ],
    [
      'PD on a level',
      (job: Loose) => {
        job.loops[2].controller.terms = 'PD';
        delete job.loops[2].present.integral;
      },
    ],
    [
      'P alone',
      (job: Loose) => {
        job.loops[1].controller.terms = 'P';
        job.loops[1].present.integral = 0;
      },
    ],
    ['a loop that has the tag of its measurement', (job: Loose) => (job.loops[2].tag = 'LI-120')],
    [
      'a loop in manual beside the one that took over its actuator',
      (job: Loose) => {
        job.loops.push({ ...job.loops[2], tag: 'LC-121', task: 'manual' });
      },
    ],
    [
      'a loop in manual without settings',
      (job: Loose) => {
        job.loops.push({ ...job.loops[2], tag: 'LC-121', task: 'manual' });
        delete job.loops[4].present;
      },
    ],
    [
      'a whole cascade in manual',
      (job: Loose) => {
        job.loops[0].task = 'manual';
        job.loops[1].task = 'manual';
      },
    ],
    ['a coupling without effect', (job: Loose) => (job.unit.responses[5].model.rate = 0)],
    [
      'a disturbance that is felt at once',
      (job: Loose) => {
        withoutPoints(job);
        job.unit.responses[5].model = {
          kind: 'transfer-function',
          numerator: [1],
          denominator: [2],
        };
      },
    ],
    [
      'as much lead as lag behind a dead time',
      (job: Loose) => {
        withoutPoints(job);
        const model = {
          kind: 'transfer-function',
          numerator: [-1, -1],
          denominator: [2, 1],
          deadTime: 1,
        };
        job.unit.responses[4].model = model;
      },
    ],
    [
      'a runaway process that one loop holds',
      (job: Loose) => {
        withoutPoints(job);
        job.unit.responses[4].model = {
          kind: 'transfer-function',
          numerator: [1],
          denominator: [2, -1],
        };
      },
    ],
    [
      'a loop in manual whose output limits exclude where it stands',
      (job: Loose) => {
        job.loops.push({ ...job.loops[2], tag: 'LC-121', task: 'manual', outputLow: 60 });
      },
    ],
    [
      'bounds that touch the allowed change in one value, rounding aside',
      (job: Loose) => {
        job.loops[1].maxChange = 3;
        job.loops[1].present = { gain: 0.7, integral: 0.3 };
        job.loops[1].bounds = { gain: [2.1, 9], integral: [0.001, 0.1] };
      },
    ],
    [
      'any bounds on a setting that is zero today, and on a loop that is kept',
      (job: Loose) => {
        job.loops[0].present.derivative = 0;
        job.loops[0].bounds = { derivative: [200, 300] };
        job.loops[3].bounds = { gain: [1, 2] };
      },
    ],
    [
      'a bound of zero on a derivative that the controller does not have',
      (job: Loose) => (job.loops[1].bounds = { derivative: [0, 0] }),
    ],
    [
      'bounds on the filter of any controller',
      (job: Loose) => (job.loops[1].bounds = { filter: [0, 1] }),
    ],
    ['a dead band of zero', (job: Loose) => (job.unit.actuators[0].deadband = 0)],
    [
      'scans of loops in manual that fit no grid',
      (job: Loose) => {
        job.loops.push({ ...job.loops[2], tag: 'LC-121', task: 'manual' });
        job.loops[4].controller = { ...job.loops[4].controller, scan: 1.37 };
      },
    ],
  ])('includes %s', (_, change) => {
    acceptedJob(exampleWith(change));
  });
});
