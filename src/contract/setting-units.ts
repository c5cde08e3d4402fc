import type { JobDocument } from './job.js';
import type { ControllerDocument, LoopDocument } from './loops.js';

export const settingNames = ['gain', 'integral', 'derivative', 'filter'] as const;

export type SettingName = (typeof settingNames)[number];

/** The units in which one loop's settings are dialled. */
export type SettingUnits = Readonly<Record<SettingName, string>>;

/** Units of a loop's measured value and of its output. */
export function loopUnits(job: JobDocument, loop: LoopDocument): { pv: string; output: string } {
  return { pv: measuredUnit(job, loop.measurement), output: outputUnit(job, loop) };
}

function outputUnit(job: JobDocument, { drives }: LoopDocument): string {
  if (typeof drives === 'string') {
    return job.unit.actuators.find(({ tag }) => tag === drives)?.unit ?? '';
  }
  const inner = job.loops.find(({ tag }) => tag === drives.loop);
  return inner === undefined ? '' : measuredUnit(job, inner.measurement);
}

const measuredUnit = (job: JobDocument, measurement: string): string =>
  job.unit.measurements.find(({ tag }) => tag === measurement)?.unit ?? '';

/** The units of a loop's settings, in the controller's own terms. */
export function settingUnits(job: JobDocument, loop: LoopDocument): SettingUnits {
  const { controller } = loop;
  const { pv, output } = loopUnits(job, loop);
  const time = controller.timeUnit;
  const gain = controller.gainIn === 'engineering' ? `${output || '1'}/${pv || '1'}` : '%/%';
  const integral = { time, repeats: `rep/${time}`, gain: `${gain}/${time}` };
  const derivative = { time, gain: `${gain} ${time}` };
  return {
    gain: controller.gainIn === 'proportional-band' ? '% band' : gain,
    integral: integral[controller.integralIn],
    derivative: derivative[controller.derivativeIn],
    filter: time,
  };
}

const gainWords = {
  percent: 'gain in percent of output per percent of PV',
  engineering: 'gain in output units per PV unit',
  'proportional-band': 'gain as proportional band',
} as const;
const integralWords = {
  time: 'integral as time per repeat',
  repeats: 'integral as repeats per time',
  gain: 'integral as gain',
} as const;
const derivativeWords = { time: 'derivative as time', gain: 'derivative as gain' } as const;

/** How a controller writes its settings, in words: what its numbers mean on a faceplate. */
export function controllerInWords(controller: ControllerDocument): string {
  const { form, terms, gainIn, integralIn, derivativeIn, scan, scanUnit } = controller;
  const parts = [`${terms}, ${form} form`, gainWords[gainIn]];
  if (terms.includes('I')) parts.push(integralWords[integralIn]);
  if (terms.includes('D')) parts.push(derivativeWords[derivativeIn]);
  parts.push(`scan of ${scan} ${scanUnit}`);
  return parts.join(', ');
}
