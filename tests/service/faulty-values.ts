import { change, type FaultyDocument, model, rational, set, source } from './faulty-document.js';

const copies = (count: number, entry: object) =>
  Array.from({ length: count }, (_, index) => ({ ...entry, tag: `X${index}` }));

/** Documents that are not JSON, or hold a value that is wrong by itself, by fault code. */
export const faultyValues = {
  DOCUMENT_TOO_LARGE: [
    source('over 8 MiB', ' '.repeat(8 * 1024 * 1024 + 1), '', /8388609 bytes.*at most 8388608/),
    source('over 8 MiB in UTF-8', `"${'é'.repeat(4194304)}"`, '', /8388610 bytes/),
    source('over a million values', `[${'1,'.repeat(1_000_000)}1]`, '[999999]', /1000000 values/),
  ],
  DOCUMENT_NOT_TEXT: [
    source(
      'a program',
      new Uint8Array([0x7f, 0x45, 0x4c, 0x46, 2, 1, 1, 0]),
      '',
      /not a JSON text/,
    ),
    source('UTF-16', new Uint8Array([0xff, 0xfe, 0x7b, 0]), '', /not a JSON text/),
  ],
  JSON_INVALID: [
    source('a comma too many', '{\n "a": 1,\n}', '', /line 3, column 1: .*found }/),
    source('a bare word', '{"unit": {"name": splitter}}', 'unit.name', /column 19.*found splitter/),
    source('a single quote', "{'a': 1}", '', /column 2.*double quotes/),
    source('a text that never ends', '{"a": "b', 'a', /never ends/),
    source('a line break in a text', '{"a": "b\nc"}', 'a', /line break/),
    source('an unknown escape', '{"a": "\\q"}', 'a', /escape/),
    source('a second document', '{} {}', '', /column 4/),
    source('nothing at all', ' \n', '', /line 2, column 1: the document is empty/),
    source('a missing colon', '{"a" 1}', 'a', /colon/),
    source('a list left open', '[1', '', /end of the text/),
    source('an octal number', '[012]', '[0]', /value was expected/),
  ],
  JSON_NOT_FINITE: [
    source('NaN', '{"a": [1, NaN]}', 'a[1]', /column 11: numbers must be finite; found NaN/),
    source('minus infinity', '[-Infinity]', '[0]', /-Infinity/),
    source('a number beyond all', '[1e999]', '[0]', /1e999/),
  ],
  JSON_TOO_DEEP: [
    source(
      '100,000 lists in each other',
      '['.repeat(100_000),
      '[0]'.repeat(32),
      /at most 32 levels/,
    ),
  ],
  KEY_DUPLICATE: [
    source('a key twice', '{"a": 1, "b": {"c": 1, "c": 1}}', 'b.c', /has this key already/),
  ],
  KEY_RESERVED: [source('a prototype', '{"a": {"__proto__": {}}}', 'a.__proto__', /reserved/)],
  KEY_UNKNOWN: [
    set('at the top', 'Search', {}, /unitLimits, search/),
    set('in a loop', 'loops[1].present.Gain', 1, /FC-111/),
    set('in a model', 'unit.responses[0].model.lead', 1),
    change(
      'in a limit',
      'loops[0].limits.peakSensitivity.nominl',
      (job) => {
        job.loops[0].limits.peakSensitivity = { max: 2, nominl: true };
      },
      /max, nominal/,
    ),
  ],
  KEY_MISSING: [
    set('a gain', 'loops[1].present.gain', undefined),
    set('a kind', 'unit.responses[0].model.kind', undefined, /first-order/),
    set('the format', 'format', undefined, /heddle-job\/1/),
  ],
  FORMAT_UNKNOWN: [
    set('a later version', 'format', 'heddle-job/2', /"heddle-job\/1"/),
    source('a front', '{"format": "heddle-front/1", "job": "x"}', 'format', /heddle-front\/1/),
    set('a number', 'format', 1),
  ],
  VALUE_TYPE: [
    source('a list for a document', '[]', '', /an object/),
    set('a text for a number', 'loops[0].controller.scan', '1 s', /"1 s"/),
    set('null for a number', 'unit.horizon', null, /null/),
    change('a text in a limit', 'loops[0].limits.gainMargin.min', (job) => {
      job.loops[0].limits.gainMargin = { min: 'two' };
    }),
    set('a list for a limit', 'loops[0].limits.gainMargin', [2], /"min": number/),
    set('a number for a source', 'unit.responses[0].from', 3, /setpointOf/),
    change('a text among coefficients', 'unit.responses[4].model.denominator[1]', (job) =>
      model(job, 4, rational([1], [2, 'x'])),
    ),
  ],
  VALUE_RANGE: [
    set('a dead time below zero', 'unit.responses[1].model.deadTime', -1, /at least 0/),
    set('a lag of zero', 'unit.responses[0].model.timeConstant', 0, /more than 0/),
    set('a period of zero', 'unit.responses[3].model.period', 0),
    set('no damping', 'unit.responses[3].model.damping', 0),
    set('no tolerance', 'loops[0].tolerance', 0),
    set('no scan', 'loops[0].controller.scan', 0),
    set('no horizon', 'unit.horizon', 0),
    set('a spread of one', 'unit.responses[1].spread.gain', 1, /less than 1/),
    set('a spread below zero', 'unit.responses[1].spread.deadTime', -0.1),
    set('one alternative', 'search.alternatives', 1, /at least 2/),
    set('101 alternatives', 'search.alternatives', 101, /at most 100/),
    set('65 models', 'search.models', 65),
    set('no model', 'search.models', 0),
    set('half a seed', 'search.seed', 1.5, /whole number/),
    set('a seed below zero', 'search.seed', -1),
    set('a seed past counting', 'search.seed', 2 ** 53),
    change(
      'an upset weight below zero',
      'search.upsetWeights.load',
      (job) => (job.search.upsetWeights = { load: -1 }),
    ),
    set('a shrinking change', 'loops[0].maxChange', 0.5, /at least 1/),
    set('a peak sensitivity of one', 'loops[0].limits.peakSensitivity', 1),
    set('a derivative below zero', 'loops[0].present.derivative', -1),
    set('a filter below zero', 'loops[0].present.filter', -1),
    change(
      'a bound of zero on the gain',
      'loops[0].bounds.gain[0]',
      (job) => (job.loops[0].bounds.gain = [0, 1]),
    ),
  ],
  VALUE_CHOICE: [
    set('an unknown kind', 'unit.responses[0].model.kind', 'third-order', /"second-order"/),
    set('a day', 'unit.timeUnit', 'd', /"s", "min", "h"/),
    set('a third filter order', 'loops[0].controller.filterOrder', 3, /1 or 2/),
    change(
      'an unknown objective',
      'search.objectives[1]',
      (job) => (job.search.objectives = ['speed', 'beauty']),
    ),
  ],
  VALUE_TEXT: [
    set('no name', 'unit.name', '', /1 to 120/),
    set('an endless unit', 'unit.measurements[0].unit', 'u'.repeat(33)),
    set('a bell in a name', 'unit.name', 'ding\u0007', /ding\\u\{7\}/),
  ],
  LIST_LENGTH: [
    set('65 loops', 'loops', copies(65, {}), /65 entries.*1 to 64/),
    set('no loop', 'loops', []),
    set('257 measurements', 'unit.measurements', copies(257, {})),
    change(
      '257 inputs',
      'unit.disturbances',
      (job) => {
        job.unit.disturbances.push(...copies(253, { unit: '', step: 0 }));
      },
      /257 actuators and disturbances together/,
    ),
    set('4097 responses', 'unit.responses', copies(4097, {}), /4097/),
    set('65 operating points', 'unit.operatingPoints', copies(65, {})),
    change('order 13', 'unit.responses[4].model.denominator', (job) =>
      model(job, 4, rational([1], Array(14).fill(1))),
    ),
    change('10,001 step values', 'unit.responses[4].model.values', (job) =>
      model(job, 4, { kind: 'step-response', interval: 1, values: Array(10_001).fill(1) }),
    ),
    change('three time constants', 'unit.responses[1].model.timeConstants', (job) =>
      model(job, 1, { kind: 'second-order', gain: 1, timeConstants: [1, 2, 3] }),
    ),
    set('half a bound', 'loops[0].bounds.gain', [1]),
  ],
} satisfies Record<string, readonly FaultyDocument[]>;
