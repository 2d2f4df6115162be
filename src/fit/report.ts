import type { FitProblem } from './problems.ts';

/** Every figure of a fit, in the units of files; printed by `fit --json` and drawn by the report. */
export interface FitReport {
  readonly rig: string;
  /** The day of the fit, as the profile will say it. */
  readonly date: string;
  readonly joints: readonly JointReport[];
  readonly servos: readonly ServoReport[];
  readonly matches: readonly MatchReport[];
  readonly suggestions: readonly SuggestionReport[];
  readonly problems: readonly FitProblem[];
}

/** A value with the half width of its 95 % interval; null where too few points leave it unknown. */
export interface Figure {
  readonly is: number;
  readonly error_95: number | null;
}

/** One joint of the leader. */
export interface JointReport {
  readonly leader: string;
  readonly joint: string;
  readonly channel: number;
  readonly still: StillReport | null;
  readonly sweep: SweepReport | null;
  readonly points: PointsReport | null;
  readonly notes: readonly string[];
}

export interface StillReport {
  readonly readings: number;
  readonly noise_counts: number;
  readonly noise_deg: number;
}

export interface SweepReport {
  readonly readings: number;
  readonly span_counts: readonly [number, number];
  readonly span_deg: readonly [number, number];
  readonly ends_confirmed: boolean;
  readonly noise_counts: number;
  readonly noise_deg: number;
  readonly effective_bits: number;
  readonly spikes: number;
  readonly dead_spots_counts: readonly (readonly [number, number])[];
  readonly gaps_counts: readonly (readonly [number, number])[];
  readonly visited_percent: number;
  readonly wraps: boolean;
  readonly hysteresis_counts: number | null;
  readonly hysteresis_deg: number | null;
  readonly hand_wobble_counts: number | null;
  readonly hysteresis_seen: boolean;
}

/** A map through measured points. `x` is counts of a leader, microseconds of a servo, degrees of a follower in a match. */
export interface PointsReport {
  readonly curve: 'straight' | 'monotone';
  readonly degree: number;
  readonly used: number;
  readonly measured: readonly MeasuredPoint[];
  /** Index into `measured` of the point left out. */
  readonly wrong: WrongReport | null;
  /** The point that agrees least of those left in, where it is worth a word. */
  readonly doubtful: WrongReport | null;
  readonly rms_deg: number;
  readonly worst_deg: number;
  /** Spread of a point about the map. */
  readonly sigma_deg: number | null;
  /** The map is off by less than this everywhere between its outer points, with 95 % confidence. */
  readonly error_95_deg: number | null;
  readonly slope_deg_per_unit: Figure;
  /** Of the straight line, at x = 0 and in the middle of the points. */
  readonly offset_deg: Figure;
  readonly middle: { readonly x: number; readonly deg: Figure };
  /** Independent linearity, percent of the converter's whole range (of the travel, for a servo). */
  readonly linearity_percent: number;
  /** What the profile gets. */
  readonly map: readonly (readonly [number, number])[];
}

export interface MeasuredPoint {
  readonly x: number;
  readonly known_deg: number;
  readonly residual_deg: number;
}

export interface WrongReport {
  readonly index: number;
  readonly away_deg: number;
  readonly sigmas: number;
}

export interface ServoReport {
  readonly follower: string;
  readonly joint: string;
  readonly channel: number;
  /** From angles at pulses; null: none was measured. */
  readonly travel: TravelReport | null;
  /** Smallest change of pulse that it answers going onward, from fine steps; null: not measured. */
  readonly deadband_us: Figure | null;
  /** Play of gears and horn: what is lost as it turns back, less what the deadband leaves; null: one of them is not known. */
  readonly backlash_deg: Figure | null;
  readonly notes: readonly string[];
}

export interface TravelReport {
  readonly points: PointsReport;
  readonly travel_deg: number;
  readonly nominal_deg: number;
  readonly between_us: readonly [number, number];
  /** Angle at one pulse come to from either side, the difference; null: not measured both ways. */
  readonly lost_motion_deg: Figure | null;
}

export interface MatchReport {
  readonly follower: string;
  readonly joint: string;
  readonly from: string;
  readonly direction: 'same' | 'reversed';
  readonly was: 'same' | 'reversed';
  readonly gain: Figure;
  readonly offset_deg: Figure;
  readonly points: PointsReport;
  readonly notes: readonly string[];
}

/** Smoothing for one joint of the leader, and deadbands for what it feeds. */
export interface SuggestionReport {
  readonly joint: string;
  readonly cutoff_hz: number | null;
  readonly lag_ms: number;
  readonly feeds: readonly {
    readonly follower: string;
    readonly joint: string;
    readonly tip_mm: number;
    readonly deadband_deg: number;
  }[];
}
