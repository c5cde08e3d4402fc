import {
  type DiscreteFeedforward,
  discretizeFeedforward,
  type FeedforwardResponse,
  type LoopNetwork,
  respondFeedforward,
} from '../controllers/index.js';
import type { ComplexMatrix } from '../numerics/index.js';

interface FeedforwardPath {
  readonly row: number;
  readonly column: number;
  readonly sampled: DiscreteFeedforward;
}

/**
 * Feedforward between the outputs of automatic loops: what it takes off the loop equations.
 *
 * A term of a disturbance is no part of any loop and does not appear.
 */
export class FeedforwardPaths {
  /** False: no output is told to another loop. */
  readonly isAny: boolean;
  private readonly paths: readonly FeedforwardPath[];
  private readonly scratch: FeedforwardResponse = { re: 0, im: 0 };

  /**
   * @param loops  loop numbers of the automatic loops, the order of rows and columns
   * @param scanOf  s between scans of a loop
   */
  constructor(network: LoopNetwork, loops: readonly number[], scanOf: (loop: number) => number) {
    this.paths = loops.flatMap((loop, row) =>
      (network.loops[loop]?.feedforward ?? []).flatMap((term): FeedforwardPath[] => {
        const column = 'loop' in term.from ? loops.indexOf(term.from.loop) : -1;
        if (column < 0) return [];
        return [{ row, column, sampled: discretizeFeedforward(term, scanOf(loop)) }];
      }),
    );
    this.isAny = this.paths.length > 0;
  }

  /** Subtract every path at z = exp(i angle). */
  subtract(angle: number, matrix: ComplexMatrix): void {
    const { paths, scratch } = this;
    for (let p = 0; p < paths.length; p += 1) {
      const { row, column, sampled } = paths[p] as FeedforwardPath;
      respondFeedforward(sampled, angle, scratch);
      const at = row * matrix.order + column;
      matrix.re[at] = (matrix.re[at] as number) - scratch.re;
      matrix.im[at] = (matrix.im[at] as number) - scratch.im;
    }
  }

  /** Every path to one row at z = exp(i angle) of that row's scan. */
  respond(
    row: number,
    angle: number,
    take: (column: number, re: number, im: number) => void,
  ): void {
    for (const path of this.paths) {
      if (path.row !== row) continue;
      respondFeedforward(path.sampled, angle, this.scratch);
      take(path.column, this.scratch.re, this.scratch.im);
    }
  }

  /** What goes from one row's output to another's at z = 1. */
  gainAtRest(row: number, column: number): number {
    let gain = 0;
    for (const path of this.paths) {
      if (path.row !== row || path.column !== column) continue;
      respondFeedforward(path.sampled, 0, this.scratch);
      gain += this.scratch.re;
    }
    return gain;
  }
}
