import { exitCode } from '../refusal.js';

/** Ends a process whose embedded database has stopped answering: it never will again. */
export function stopStuck(): void {
  process.stderr.write(
    'heddle: the database in the data folder has stopped answering, as it does when its disk is full; ' +
      'stopping. Nothing accepted is lost: make room, and start again\n',
  );
  process.exit(exitCode.failed);
}
