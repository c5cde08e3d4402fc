import type { FastifyReply } from 'fastify';
import { ServiceProblem } from '../service/index.js';

/** The requests that somebody waits for, so that work for nobody is stopped. */
export class OpenRequests {
  private readonly working = new Set<AbortController>();
  private closing = false;

  /** The server is stopping: nothing new is begun. */
  get isClosing(): boolean {
    return this.closing;
  }

  /** Aborted once the caller is gone without the whole answer, or the server stops. */
  signalOf(reply: FastifyReply): AbortSignal {
    const controller = new AbortController();
    if (this.closing) controller.abort(stopping());
    this.working.add(controller);
    reply.raw.once('close', () => {
      this.working.delete(controller);
      if (!reply.raw.writableFinished) controller.abort();
    });
    return controller.signal;
  }

  /** Does work that stops with the caller or the server. @throws STOPPING where the server does */
  async work<Result>(
    reply: FastifyReply,
    begin: (signal: AbortSignal) => Promise<Result>,
  ): Promise<Result> {
    const signal = this.signalOf(reply);
    try {
      return await begin(signal);
    } catch (error) {
      throw signal.reason instanceof ServiceProblem ? signal.reason : error;
    }
  }

  /** Stops everything that is being worked on. */
  close(): void {
    this.closing = true;
    for (const controller of this.working) controller.abort(stopping());
  }
}

/** What a request is told while the server stops. */
export const stopping = (): ServiceProblem =>
  new ServiceProblem('STOPPING', 'the server is stopping; ask again once it has started anew');
