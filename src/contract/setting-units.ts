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
  const [output100 = '', pv100 = ''] = gain.split('/');
  // Written so that nobody reads it as an integral gain's per time.
  const derivative = { time, gain: `${output100}·${time}/${pv100}` };
  return {
    gain: controller.gainIn === 'proportional-band' ? '% band' : gain,
    integral: integral[controller.integralIn],
    derivative: derivative[controller.derivativeIn],
    filter: time,
  };
}

/** What each number of a controller is called, as it is dialled. */
export function settingWords(
  controller: ControllerDocument,
): Readonly<Record<SettingName, string>> {
  const { gainIn, integralIn, derivativeIn } = controller;
  return {
    gain: gainIn === 'proportional-band' ? 'proportional band' : 'gain',
    integral: { time: 'integral time', repeats: 'integral rate', gain: 'integral gain' }[
      integralIn
    ],
    derivative: { time: 'derivative time', gain: 'derivative gain' }[derivativeIn],
    filter: 'PV filter time',
  };
}

/**
 * What a move of a number does to the action it stands for, in words: a longer integral time is less
 * integral action, a wider proportional band less gain.
 */
export function moveInWords(
  setting: SettingName,
  controller: ControllerDocument,
  old: number | null,
  proposed: number,
): string {
  if (old === null) return 'in manual today';
  if (old === proposed) return 'unchanged';
  if (setting === 'filter' || setting === 'derivative' || controller.integralIn !== 'time') {
    if (old === 0) return 'switched on';
    if (proposed === 0) return 'switched off';
  }
  const inverse =
    (setting === 'gain' && controller.gainIn === 'proportional-band') ||
    (setting === 'integral' && controller.integralIn === 'time');
  const ratio = Math.abs(inverse ? old / proposed : proposed / old);
  if (!Number.isFinite(ratio)) return 'switched';
  const words = setting === 'filter' ? ['longer', 'shorter'] : ['stronger', 'weaker'];
  return `${words[ratio > 1 ? 0 : 1]}, ${Number(ratio.toPrecision(3))} x`;
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
  if (terms.includes('D')) {
    const { derivativeOn, derivativeGain } = controller;
    parts.push(
      `${derivativeWords[derivativeIn]}, on the ${derivativeOn}, limited to N ${derivativeGain}`,
    );
  }
  if (controller.filterOrder === 2) parts.push('second-order PV filter');
  if (controller.setpointWeight !== 1) parts.push(`setpoint weight ${controller.setpointWeight}`);
  parts.push(`scan of ${scan} ${scanUnit}`);
  return parts.join(', ');
}
