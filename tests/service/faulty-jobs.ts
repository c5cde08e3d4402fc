import type { Loose } from '../documents.js';
import { singleLoop } from './single-loop.js';

const changed = (change: (job: Loose) => void): string => {
  const job: Loose = singleLoop();
  change(job);
  return JSON.stringify(job);
};

export interface FaultyJob {
  readonly what: string;
  readonly text: string | Buffer;
  readonly code: string;
  /** Where the fault is. */
  readonly path: string;
}

/** Documents that must be refused, each with the fault that has to be named. */
export const faultyJobs: readonly FaultyJob[] = [
  { what: 'an empty file', text: '', code: 'JSON_INVALID', path: '' },
  { what: 'JSON that breaks off', text: '{ "format": ', code: 'JSON_INVALID', path: 'format' },
  {
    what: 'a binary file',
    text: Buffer.from([0x7f, 0x45, 0x4c, 0x46, 0x02, 0x00, 0xff, 0xfe]),
    code: 'DOCUMENT_NOT_TEXT',
    path: '',
  },
  {
    what: 'an unknown key',
    text: changed((job) => {
      job.loops[0].tunning = 1;
    }),
    code: 'KEY_UNKNOWN',
    path: 'loops[0].tunning',
  },
  {
    what: 'a missing tag',
    text: changed((job) => {
      delete job.loops[0].tag;
    }),
    code: 'KEY_MISSING',
    path: 'loops[0].tag',
  },
  {
    what: 'a tag given twice',
    text: changed((job) => {
      job.unit.actuators.push({ ...job.unit.actuators[0] });
    }),
    code: 'TAG_DUPLICATE',
    path: 'unit.actuators[1].tag',
  },
  {
    what: 'NaN',
    text: changed((job) => {
      job.loops[0].present.gain = 1.25;
    }).replace('1.25', 'NaN'),
    code: 'JSON_NOT_FINITE',
    path: 'loops[0].present.gain',
  },
  {
    what: 'a negative dead time',
    text: changed((job) => {
      job.unit.responses[0].model.deadTime = -1;
    }),
    code: 'VALUE_RANGE',
    path: 'unit.responses[0].model.deadTime',
  },
  {
    what: 'a span of zero',
    text: changed((job) => {
      job.unit.measurements[0].high = 0;
    }),
    code: 'RANGE_ORDER',
    path: 'unit.measurements[0].high',
  },
  {
    what: 'a loop whose response is missing',
    text: changed((job) => {
      job.unit.measurements.push({ ...job.unit.measurements[0], tag: 'TI-102' });
      job.loops[0].measurement = 'TI-102';
    }),
    code: 'RESPONSE_MISSING',
    path: 'loops[0]',
  },
  {
    what: '65 loops',
    text: changed((job) => {
      job.loops = Array.from({ length: 65 }, (_, k) => ({ ...job.loops[0], tag: `TC-${k}` }));
    }),
    code: 'LIST_LENGTH',
    path: 'loops',
  },
];
