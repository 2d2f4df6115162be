import type { PointMap } from '../map/points.ts';

/** A leader as the kernels need it: radians, integer microseconds. Compiled from a leader file. */
export interface LeaderSpec {
  readonly name: string;
  readonly joints: readonly LeaderJointSpec[];
  readonly buttons: readonly ButtonSpec[];
  /** Readings older than this start no motion; Infinity for a board that only speaks on change. */
  readonly timeoutUs: number;
  /** What the converter can read. */
  readonly countsMin: number;
  readonly countsMax: number;
}

export interface LeaderJointSpec {
  readonly name: string;
  /** Index into a reading's counts. */
  readonly input: number;
  /** Counts to radians, going on straight beyond the outer points. */
  readonly map: PointMap;
  /** What the joint really reaches, in counts. */
  readonly travelMin: number;
  readonly travelMax: number;
  /** Median window in readings, odd; 1 is off. */
  readonly despike: number;
  readonly smooth: OneEuroSpec | null;
}

export interface OneEuroSpec {
  readonly cutoffHz: number;
  /** Rise of the cutoff with speed, in hertz per (radian per second). */
  readonly betaHzPerRadS: number;
  readonly slopeCutoffHz: number;
}

export type ButtonDuty = 'enable' | 'hold' | 'clutch' | 'stop' | 'mark' | 'join';

export interface ButtonSpec {
  readonly name: string;
  readonly input: number;
  readonly pressed: 'below' | 'above';
  readonly counts: number;
  readonly does: ButtonDuty;
}
