import { type ExitCode, exitCode } from './refusal.js';

/**
 * Work that can be told to stop: Ctrl-C, a request to terminate, or a terminal that closes. The first
 * signal asks; one that comes later ends the process at once. Repeats within a moment are echoes of
 * the first: a terminal tells a whole group of processes, and those that started this one tell it again.
 */
export interface Interruption {
  readonly signal: AbortSignal;
  /** The exit code of the signal that came, if one did. */
  readonly code: ExitCode | undefined;
  /** Signals have their usual effect again. */
  release(): void;
}

const echoMs = 500;
const codes = {
  SIGINT: exitCode.interrupted,
  SIGTERM: exitCode.terminated,
  SIGHUP: exitCode.hungUp,
} as const;

export function listenForInterruption(): Interruption {
  const controller = new AbortController();
  let code: ExitCode | undefined;
  let since = 0;
  const listeners = Object.entries(codes).map(([name, ending]) => {
    const listener = (): void => {
      if (code !== undefined) {
        if (performance.now() - since > echoMs) process.exit(ending);
        return;
      }
      since = performance.now();
      code = ending;
      controller.abort();
    };
    process.on(name, listener);
    return () => process.off(name, listener);
  });
  return {
    signal: controller.signal,
    get code() {
      return code;
    },
    release() {
      for (const stop of listeners) stop();
    },
  };
}
