import { Presets, SingleBar } from 'cli-progress';
import type { StudyProgress } from '../study/index.js';
import { duration } from './tables/figures.js';

/** Shows how a study stands while it runs, on the stream for notes. */
export interface StageDisplay {
  show(progress: StudyProgress): void;
  /** Takes the display off; what is written then stands below what was. */
  end(): void;
}

/** A bar that moves on a terminal; a line a stage where the notes go to a file or a pipe. */
export function stageDisplay(stream: NodeJS.WriteStream): StageDisplay {
  return stream.isTTY ? new StageBar(stream) : new StageLines(stream);
}

class StageLines implements StageDisplay {
  private readonly start = performance.now();
  private shown = -1;

  constructor(private readonly stream: NodeJS.WriteStream) {}

  show({ stage, stageIndex, stageCount, total }: StudyProgress): void {
    if (stageIndex === this.shown) return;
    this.shown = stageIndex;
    const tasks = total === 1 ? '1 task' : `${total} tasks`;
    const elapsed = clock((performance.now() - this.start) / 1000);
    const place = `stage ${stageIndex + 1} of ${stageCount}`;
    this.stream.write(`heddle: ${elapsed}  ${place}, ${stage} (${tasks})\n`);
  }

  end(): void {}
}

const redrawMs = 500;
const longestStage = 18;
/** Columns that everything but the bar takes. */
const besideBar = 52;

class StageBar implements StageDisplay {
  private readonly start = performance.now();
  private readonly bar: SingleBar;
  private readonly timer: NodeJS.Timeout;
  private latest: StudyProgress | undefined;
  /** When the latest came, s since the start. */
  private since = 0;

  constructor(stream: NodeJS.WriteStream) {
    const room = (stream.columns ?? 80) - besideBar;
    this.bar = new SingleBar(
      {
        stream,
        format: '{stage} {bar} {share}  {elapsed}{left}',
        barsize: Math.min(40, Math.max(8, room)),
        barCompleteChar: '\u25aa',
        barIncompleteChar: '\u00b7',
        hideCursor: null,
        clearOnComplete: true,
        gracefulExit: false,
        linewrap: null,
      },
      Presets.legacy,
    );
    this.bar.start(1, 0, { stage: ''.padEnd(longestStage), share: '', elapsed: '', left: '' });
    this.timer = setInterval(() => this.draw(), redrawMs);
    this.timer.unref();
  }

  show(progress: StudyProgress): void {
    this.latest = progress;
    this.since = this.elapsed();
    this.draw();
  }

  end(): void {
    clearInterval(this.timer);
    this.bar.stop();
  }

  private elapsed(): number {
    return (performance.now() - this.start) / 1000;
  }

  private draw(): void {
    if (this.latest === undefined) return;
    const { stage, fraction } = this.latest;
    const elapsed = this.elapsed();
    this.bar.update(fraction, {
      stage: stage.padEnd(longestStage),
      share: `${Math.floor(100 * fraction)} %`.padStart(5),
      elapsed: clock(elapsed),
      left: timeLeft(fraction, this.since, elapsed),
    });
  }
}

/**
 * What is left if the rest goes as what was done when a task last ended; nothing is said before there
 * is something to go by.
 */
function timeLeft(fraction: number, since: number, elapsed: number): string {
  if (fraction < 0.1 || since < 2) return '';
  const left = Math.max(1, since / fraction - elapsed);
  return `, about ${duration(left < 10 ? Math.ceil(left) : Number(left.toPrecision(2)))} left`;
}

/** Minutes and seconds, with hours once there are any. */
function clock(seconds: number): string {
  const whole = Math.floor(seconds);
  const two = (value: number): string => String(value).padStart(2, '0');
  const minutes = Math.floor(whole / 60);
  if (minutes < 60) return `${minutes}:${two(whole % 60)}`;
  return `${Math.floor(minutes / 60)}:${two(minutes % 60)}:${two(whole % 60)}`;
}
