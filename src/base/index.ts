export { CodedError, type ErrorCode, errorCodes } from './errors.js';
export { Random } from './random.js';
