export { ServiceProblem } from './problem.js';
export type { Readiness, Service } from './service.js';
export { sheetCsv } from './sheet-csv.js';
