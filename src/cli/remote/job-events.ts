import { createParser, type EventSourceMessage } from 'eventsource-parser';
import { type JobRecord, jobRecordSchema, problemSchema } from '../../contract/index.js';
import { brokenOff } from './exchange.js';
import { jsonValue } from './json-value.js';
import { mediaType, notHeddle, RemoteProblem, ServerUnreachable } from './remote-refusals.js';

/** A server says that it is still there more often than this, ms. */
const silenceMs = 120_000;

/**
 * The records of a stream of server-sent events, in the order they came; ends when the stream does.
 * @throws {Refusal} where the connection breaks or falls silent, or says what is no job
 */
export async function* jobEvents(
  server: string,
  response: Response,
  signal: AbortSignal,
): AsyncGenerator<JobRecord> {
  const { body } = response;
  if (body === null || mediaType(response) !== 'text/event-stream') {
    await body?.cancel().catch(() => undefined);
    throw notHeddle(server, `events come as ${mediaType(response) || 'nothing'}`);
  }
  const waiting: EventSourceMessage[] = [];
  const parser = createParser({ onEvent: (event) => waiting.push(event) });
  const decoder = new TextDecoder();
  const reader = body.getReader();
  try {
    for (;;) {
      const { done, value } = await beforeSilence(reader.read(), server, signal);
      if (done) return;
      parser.feed(decoder.decode(value, { stream: true }));
      for (const event of waiting.splice(0)) {
        const record = recordOf(server, event);
        if (record !== null) yield record;
      }
    }
  } finally {
    await reader.cancel().catch(() => undefined);
  }
}

/** The record of an event; null for events of other kinds, which later servers may send. */
function recordOf(server: string, { event, data }: EventSourceMessage): JobRecord | null {
  if (event !== 'job' && event !== 'problem') return null;
  const said = jsonValue(data);
  if (event === 'problem') {
    const stated = problemSchema.safeParse(said);
    if (stated.success) throw new RemoteProblem(stated.data, undefined);
  } else {
    const record = jobRecordSchema.safeParse(said);
    if (record.success) return record.data;
  }
  throw notHeddle(server, `an event ${event} is not what it should be`);
}

async function beforeSilence<Value>(
  reading: Promise<Value>,
  server: string,
  signal: AbortSignal,
): Promise<Value> {
  let timer: NodeJS.Timeout | undefined;
  const silence = new Promise<never>((_, reject) => {
    timer = setTimeout(
      () => reject(new ServerUnreachable(server, 'the connection went silent', true)),
      silenceMs,
    );
  });
  try {
    return await Promise.race([reading, silence]);
  } catch (error) {
    throw brokenOff(server, error, signal);
  } finally {
    clearTimeout(timer);
  }
}
