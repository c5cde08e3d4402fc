export {
  type InstallationSettings,
  openServer,
  openWorker,
  type Place,
  type Running,
} from './installation.js';
export { ServiceProblem } from './problem.js';
export type { Readiness, Service, Submission } from './service.js';
export { sheetCsv } from './sheet-csv.js';
