import type { ProblemDocument } from '../../contract/index.js';
import {
  type Answer,
  answered,
  offline,
  refused,
  troubleOf,
  unknownFormat,
  unreadable,
} from './answer.js';

interface Sending {
  readonly method?: 'GET' | 'POST';
  readonly body?: string | Blob;
  readonly headers?: Readonly<Record<string, string>>;
  readonly signal?: AbortSignal;
}

/**
 * Asks the server for one JSON document.
 * @param path  below `api/`, its parts encoded
 * @throws only when the signal is aborted
 */
export async function ask<Value>(path: string, sending: Sending = {}): Promise<Answer<Value>> {
  const { signal } = sending;
  let response: Response;
  try {
    response = await fetch(`api/${path}`, {
      method: sending.method ?? 'GET',
      headers: { accept: 'application/json, application/problem+json', ...sending.headers },
      body: sending.body ?? null,
      signal: signal ?? null,
    });
  } catch (error) {
    if (signal?.aborted) throw error;
    return refused(offline);
  }
  const value: unknown = await response.json().catch((error: unknown) => {
    if (signal?.aborted) throw error;
    return undefined;
  });
  if (response.ok && value !== undefined) return answered(value as Value);
  return refused(isProblem(value) ? troubleOf(value) : unreadable(response.status));
}

/** The same with an object sent as JSON. */
export const send = <Value>(path: string, message: object): Promise<Answer<Value>> =>
  ask(path, {
    method: 'POST',
    body: JSON.stringify(message),
    headers: { 'content-type': 'application/json' },
  });

/** The answer, where it is a document of the format that this page reads. */
export function inFormat<Value extends { readonly format: string }>(
  format: Value['format'],
  answer: Answer<Value>,
): Answer<Value> {
  if (!answer.ok || answer.value.format === format) return answer;
  return refused(unknownFormat(answer.value.format, format));
}

function isProblem(value: unknown): value is ProblemDocument {
  if (typeof value !== 'object' || value === null) return false;
  const { title, detail, code } = value as Partial<ProblemDocument>;
  return [title, detail, code].every((text) => typeof text === 'string');
}
