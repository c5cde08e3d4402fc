/**
 * What can be wrong with a document, each by a code. A code is a contract: documented, stable, and
 * defined here alone.
 */
export const faultCodes = {
  DOCUMENT_TOO_LARGE: 'the document is larger than Heddle reads',
  DOCUMENT_NOT_TEXT: 'the bytes are not UTF-8 text',
  JSON_INVALID: 'the text is not JSON; line and column say where it stops being so',
  JSON_NOT_FINITE: 'NaN, Infinity, or a number too large to be held',
  JSON_TOO_DEEP: 'lists and objects are nested deeper than any document needs',
  KEY_DUPLICATE: 'an object names the same key twice',
  KEY_RESERVED: 'a key that no document may use',
  KEY_UNKNOWN: 'a key this document does not have',
  KEY_MISSING: 'a required key is absent',
  FORMAT_UNKNOWN: 'the document says it is of another kind or version',
  VALUE_TYPE: 'a value of the wrong type',
  VALUE_RANGE: 'a number outside what is allowed',
  VALUE_CHOICE: 'a word that is not one of the choices',
  VALUE_TEXT: 'a text that is empty, too long or not printable',
  LIST_LENGTH: 'a list with too many or too few entries',
  TAG_INVALID: 'a tag that is empty, too long, not printable or reserved',
  TAG_DUPLICATE: 'a tag or name that is given twice',
  REFERENCE_UNKNOWN: 'a tag that nothing in the document carries',
  RANGE_ORDER: 'a low end that is not below its high end',
  OUTSIDE_RANGE: 'a value outside the range it belongs to',
  MODEL_INCONSISTENT: 'the numbers of a response do not describe one process',
  RESPONSE_DUPLICATE: 'a second response between the same two points',
  RESPONSE_SELF: 'a response from a measurement to itself',
  RESPONSE_IMPROPER: 'a response whose numerator outgrows its denominator',
  RESPONSE_ALGEBRAIC: 'a response that would answer a controller without any delay',
  RESPONSE_ZERO: 'a response that never moves its measurement',
  RESPONSE_RING: 'measurements that respond to each other in a ring',
  RESPONSE_MISSING: 'a loop whose output does not reach its measurement',
  SETPOINT_SOURCE: 'a response from the setpoint of a loop that does not stay closed as it is',
  POINT_MISMATCH: 'an operating point whose responses are not those of the unit',
  FEEDFORWARD_IMPROPER: 'a feedforward term with a lead and no lag',
  FEEDFORWARD_RING: 'feedforward that comes back to the output it starts from without any delay',
  CASCADE_RING: 'loops that drive each other in a ring',
  CASCADE_BROKEN: 'a closed loop that drives the setpoint of a loop in manual',
  DRIVEN_TWICE: 'an actuator or inner loop that two closed loops drive',
  CONTROLLED_TWICE: 'a measurement that two closed loops control',
  NOTHING_TO_RETUNE: 'no loop has the task retune',
  PRESENT_MISSING: 'a closed loop whose present settings are needed and not stated',
  SETTING_MISSING: 'a setting that the controller needs',
  SETTING_SIGN: 'a setting of zero or of the wrong sign',
  SETTING_UNUSED: 'a setting, or a bound on one, that the controller does not have',
  BOUNDS_APART: 'bounds that leave nothing within the allowed change from today',
  TERMS_UNSUITED: 'controller terms that cannot hold this process',
  BAND_MISSING: 'an averaging loop without its level band',
  BAND_UNSUITED: 'a level band on a loop that is not averaging',
  LIMIT_DIRECTION: 'a limit that is stated from the wrong side',
  OBJECTIVES_INCOMPLETE: 'objectives without speed or robustness, or one of them twice',
  UPSET_WEIGHTS: 'upset weights that leave nothing to judge by',
  SCANS_UNRELATED: 'scan intervals that share no common grid',
  TOO_MANY_SCANS: 'a horizon or dead time of more scans than can be simulated',
  HORIZON_SHORT: 'a horizon too short to show anything',
  NOT_YET_AVAILABLE: 'a part of the format that this release cannot compute',
} as const;

/** How many faults one reading lists; the others are counted. */
export const mostFaults = 200;

export type FaultCode = keyof typeof faultCodes;

/** One thing wrong with a document: where, the value found there, what is wrong, what is allowed. */
export interface Fault {
  readonly code: FaultCode;
  /** Where in the document, as in `loops[2].controller.scan`; empty for the document itself. */
  readonly path: string;
  /** The tag, pair or name of the entry the path lies in, where it has one. */
  readonly subject?: string;
  /** The value found, short and printable; `nothing` where a value is absent. */
  readonly value: string;
  readonly problem: string;
  readonly allowed: string;
}

/** One thing in an accepted document that its author should know. */
export interface Warning {
  readonly path: string;
  readonly value: string;
  readonly problem: string;
}

/** The fault on one line: path, entry, what is wrong, what was found, what is allowed. */
export function describeFault(fault: Fault): string {
  const subject = fault.subject === undefined ? '' : ` (${fault.subject})`;
  const place = fault.path === '' ? 'document' : `${fault.path}${subject}`;
  return `${place}: ${fault.problem}; found ${fault.value}; allowed: ${fault.allowed}`;
}
