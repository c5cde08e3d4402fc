/** Figures of a loop that can be limited, and from which side. */
export const loopLimitSides = {
  overshoot: 'max',
  settlingTime: 'max',
  peakDeviation: 'max',
  peakSensitivity: 'max',
  gainMargin: 'min',
  phaseMargin: 'min',
  outputNoise: 'max',
  outputRate: 'max',
  outputMove: 'max',
  travel: 'max',
  upsetToOthers: 'max',
  levelBand: 'max',
} as const;

export type LoopQuantity = keyof typeof loopLimitSides;

/** Figures of the unit that can be limited. */
export type UnitQuantity = 'peakSingularValueS' | 'peakSingularValueT' | 'anySingleLoopInManual';

/** A limit on a figure of one loop. */
export interface LoopLimit {
  readonly loop: number;
  readonly quantity: LoopQuantity;
  readonly bound: number;
  readonly nominal: boolean;
}

/** A limit on a figure of the unit. */
export interface UnitLimit {
  readonly loop: null;
  readonly quantity: UnitQuantity;
  readonly bound: number;
  readonly nominal: boolean;
}

/** Something that must hold; over the whole model set unless `nominal`. */
export type Limit = LoopLimit | UnitLimit;
