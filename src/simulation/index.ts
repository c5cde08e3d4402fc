export { kernelAtScan } from './equipped-kernel.js';
export { figureCount, type KernelSetup, type SimulationKernel } from './kernel.js';
export { type PlainRun, simulatePlainly, type Trajectory } from './plain.js';
export { ScalarKernel } from './scalar-kernel.js';
export { TwoRateKernel, type TwoRateSetup } from './two-rate-kernel.js';
export type { Upset } from './upset.js';
