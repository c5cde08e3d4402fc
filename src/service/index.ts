export { ServiceProblem } from './problem.js';
export type { Readiness, Service } from './service.js';
