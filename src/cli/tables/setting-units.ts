import type { JobDocument, LoopDocument } from '../../contract/index.js';

export type SettingName = 'gain' | 'integral' | 'derivative' | 'filter';

export const settingNames: readonly SettingName[] = ['gain', 'integral', 'derivative', 'filter'];

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
