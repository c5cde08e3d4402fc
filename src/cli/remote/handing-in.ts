import type { DocumentBytes } from '../read-document.js';
import { exitCode, Refusal } from '../refusal.js';
import type { Client, HandedIn } from './client.js';
import { Patience } from './patience.js';
import { mayPass, ServerUnreachable } from './remote-refusals.js';

/**
 * Hands in a document once, however often the connection breaks meanwhile: every attempt carries the
 * same key, so that the server knows it for the same job.
 *
 * A server that was never reached is not tried again: nothing is lost by saying so at once.
 * @throws {Refusal} what is wrong with the document, or that the server cannot be reached
 */
export async function handIn(
  client: Client,
  { bytes, name }: DocumentBytes,
  key: string,
  seconds: number,
): Promise<HandedIn> {
  const patience = new Patience(seconds);
  let arrived = false;
  for (;;) {
    try {
      return await client.submit(bytes, key, name);
    } catch (error) {
      if (!mayPass(error)) throw error;
      arrived ||= error instanceof ServerUnreachable && error.mayHaveArrived;
      if (!arrived) throw error;
      if (!(await patience.wait())) throw uncertain(error, key);
    }
  }
}

/** The server may have taken the job and be unable to say so. */
function uncertain(error: Refusal, key: string): Refusal {
  const complaints = error.complaints.map((complaint) => ({
    ...complaint,
    problem: `${complaint.problem}, so it is not known whether the job was accepted`,
    allowed: `the same again with --key ${key}: a job that was accepted is not accepted twice`,
  }));
  return new Refusal(exitCode.failed, complaints);
}
