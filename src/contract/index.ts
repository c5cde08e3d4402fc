export { documentSizeFault, mostDocumentBytes, readDocumentText } from './document-text.js';
export { type EvaluationDocument, evaluationFormat, evaluationSchema } from './evaluation.js';
export { excerpt, pathText } from './excerpt.js';
export { describeFault, type Fault, type FaultCode, faultCodes, type Warning } from './faults.js';
export {
  type Alternative,
  type AlternativeDetail,
  type AssumedLimit,
  alternativeDetailSchema,
  alternativeFormat,
  alternativeIdSchema,
  type Baseline,
  type BindingLimit,
  type FrontDocument,
  frontFormat,
  frontSchema,
  type Infeasibility,
  proposableIdSchema,
  scoredNameSchema,
  type Verification,
} from './front.js';
export type { ActuatorDocument, DisturbanceDocument, MeasurementDocument } from './instruments.js';
export { type JobDocument, type JobInput, jobFormat, jobSchema, scanSeconds } from './job.js';
export { limitInWords } from './limit-words.js';
export {
  type LoopLimitName,
  type LoopLimitsDocument,
  type LowerLimit,
  limitBound,
  type UnitLimitName,
  type UnitLimitsDocument,
  type UpperLimit,
} from './limits.js';
export type {
  ControllerDocument,
  ControllerTerms,
  DrivesDocument,
  FeedforwardDocument,
  LoopDocument,
} from './loops.js';
export type {
  LimitCycleMetrics,
  LoopMetrics,
  Metrics,
  UnitMetrics,
  UpsetMetrics,
  UpsetScore,
} from './metrics.js';
export { type JobRead, type Refused, readJob } from './read-job.js';
export { type MessageRead, readMessage } from './read-message.js';
export { readSettings, type SettingsRead } from './read-settings.js';
export type {
  ResponseDocument,
  ResponseModel,
  ResponseSource,
  SpreadDocument,
} from './responses.js';
export { secondsPer, type TimeUnit } from './scalars.js';
export { commonGrid } from './scans.js';
export {
  type Objectives,
  type ScoredSettings,
  scoredSettingsSchema,
  type Trend,
} from './scored.js';
export type { Objective, SearchDocument, UpsetKind } from './search.js';
export {
  type Act,
  actSchema,
  type Cancellation,
  type ChangeList,
  type ChangeRecord,
  type ChangeState,
  cancellationSchema,
  changeIdSchema,
  changeListSchema,
  changeSchema,
  type Proposal,
  proposalSchema,
} from './service/changes.js';
export { type CheckReport, checkReportSchema } from './service/check-report.js';
export {
  type AcceptedJob,
  acceptedJobSchema,
  hasEnded,
  type JobList,
  type JobProgress,
  type JobQuery,
  type JobRecord,
  type JobState,
  jobIdSchema,
  jobListSchema,
  jobQuerySchema,
  jobRecordSchema,
  jobStateSchema,
} from './service/job-record.js';
export {
  type Keeping,
  keepingSchema,
  type OwnSettings,
  type OwnSettingsList,
  ownSettingsListSchema,
  ownSettingsSchema,
} from './service/own-settings.js';
export {
  type ProblemCode,
  type ProblemDocument,
  problemCodes,
  problemSchema,
  problemType,
} from './service/problems.js';
export { livenessSchema, readinessSchema } from './service/readiness.js';
export {
  type Expectation,
  type SheetDocument,
  type SheetLoop,
  type SheetSetting,
  sheetFormat,
  sheetSchema,
} from './service/sheet.js';
export {
  type CellFault,
  type CellWarning,
  cellFaultSchema,
  cellWarningSchema,
  describeCellFault,
  describeSpot,
  type Grid,
  type GridCell,
  type GridSheet,
  gridSchema,
  mostOfSpreadsheet,
  type SpreadsheetFaultCode,
  type SpreadsheetReading,
  spreadsheetFaultCodes,
  spreadsheetReadingSchema,
} from './service/spreadsheet.js';
export {
  controllerInWords,
  loopUnits,
  moveInWords,
  type SettingName,
  settingNames,
  settingUnits,
  settingWords,
} from './setting-units.js';
export {
  type InternalSettingsDocument,
  type LoopSettingsDocument,
  type SettingsDocument,
  settingsSchema,
} from './settings.js';
export { mostOf, type OperatingPointDocument, type UnitDocument } from './unit.js';
