export { type ApiOptions, type ApiTimes, buildApi } from './api.js';
