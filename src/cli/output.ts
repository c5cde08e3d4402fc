import { exitCode } from './refusal.js';
import { colouredPaint, type Paper, plainPaint } from './tables/paper.js';

/** Columns of a page where nobody says how wide it is, and the most that is used of a wide one. */
const usualWidth = 80;
const mostWidth = 120;

/** What a stream's reader sees: its width, and colours on a terminal unless NO_COLOR is set. */
export function paperOf(
  stream: NodeJS.WriteStream,
  environment: NodeJS.ProcessEnv = process.env,
): Paper {
  const stated = Number(environment['COLUMNS']);
  const columns = stream.isTTY ? stream.columns : stated;
  const width = Number.isInteger(columns) && columns > 0 ? columns : usualWidth;
  const coloured =
    stream.isTTY && (environment['NO_COLOR'] ?? '') === '' && environment['TERM'] !== 'dumb';
  return {
    width: Math.min(mostWidth, Math.max(40, width)),
    paint: coloured ? colouredPaint : plainPaint,
  };
}

/** One JSON document on standard output, and nothing else. */
export function writeJson(document: unknown): void {
  process.stdout.write(`${JSON.stringify(document)}\n`);
}

let isListening = false;

/**
 * Lets a reader leave early: `heddle ... | head` ends quietly once nobody reads what is still to
 * come. Without a reader for its notes a command goes on. Output that cannot be written is a failure.
 */
export function endQuietlyWithoutReader(): void {
  if (isListening) return;
  isListening = true;
  process.stdout.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code === 'EPIPE') process.exit();
    const why =
      error.code === 'ENOSPC' ? 'there is no room left' : `it cannot be written: ${error.code}`;
    process.stderr.write(`standard output: ${why}\n`);
    process.exit(exitCode.failed);
  });
  process.stderr.on('error', (error: NodeJS.ErrnoException) => {
    if (error.code !== 'EPIPE') throw error;
  });
}
