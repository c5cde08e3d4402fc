import type { Alternative, OwnSettings } from '../contract/index.js';

/** What a change can propose: an alternative of a front, or settings that somebody kept. */
export type Proposed = Alternative | OwnSettings;
