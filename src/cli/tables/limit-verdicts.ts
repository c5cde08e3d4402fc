/** What a tuning set made of one limit, in words and the document's units. */
export interface LimitVerdict {
  /** Null for a limit of the unit. */
  readonly loop: string | null;
  readonly limit: string;
  readonly asked: string;
  readonly reached: string;
  /** Null where it cannot be judged. */
  readonly holds: boolean | null;
  /** It concerns the nominal unit alone. */
  readonly nominal: boolean;
  /** False where it was taken because the document states none. */
  readonly stated: boolean;
}
