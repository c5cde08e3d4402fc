export { readGrid } from './grid-reading.js';
export {
  isSpreadsheet,
  readSpreadsheet,
  type SpreadsheetFormat,
  writeSpreadsheet,
  writeTemplate,
} from './spreadsheet.js';
