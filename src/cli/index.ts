export { runCommandLine } from './command-line.js';
export { checkPage } from './tables/check-page.js';
export type { EvaluationView } from './tables/evaluation-loops.js';
export { evaluationPage } from './tables/evaluation-page.js';
export { type Cost, costLine, frontPage } from './tables/front-page.js';
export { frontTable } from './tables/front-table.js';
export { colouredPaint, type Paint, type Paper, plainPaper } from './tables/paper.js';
