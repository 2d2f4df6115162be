import { US_PER_MS, US_PER_S } from '../clock/clock.ts';
import { BLOCKS, LIMITS } from '../follower/reasons.ts';
import { STATES, type State } from '../follower/states.ts';
import { type Movement, movements } from './movements.ts';
import type { Mark, Take } from './reader.ts';
import { EVENT_CODES, type Row, type RowFollower } from './row.ts';

/** What a take holds, in the units of files; keys are the ones `--json` prints. */
export interface TakeSummary {
  readonly take: string;
  readonly rig: string;
  readonly made_by: string;
  readonly parents: readonly string[];
  readonly duration_s: number;
  readonly rows: number;
  readonly bytes: number;
  /** null: it ended properly. */
  readonly lost_bytes: number | null;
  readonly damaged_rows: number;
  readonly marks: readonly { readonly mark: string; readonly t_s: number }[];
  readonly leader: {
    readonly leader: string;
    readonly joints: readonly string[];
    readonly readings: number;
    /** Pauses between readings, or poses, of more than `DROPOUT_US`. */
    readonly dropouts: readonly Span[];
  };
  readonly followers: readonly FollowerSummary[];
}

export interface Span {
  readonly from_s: number;
  readonly to_s: number;
}

export interface FollowerSummary {
  readonly follower: string;
  readonly commands: number;
  /** Seconds in each state it was in. */
  readonly states: Partial<Record<State, number>>;
  /** Seconds in which it had to stand although it was asked to follow, by reason. */
  readonly blocked_s: Partial<Record<keyof typeof BLOCKS, number>>;
  readonly movements: number;
  /** Medians over its movements at 100 Hz; null without one. */
  readonly spectral_arc_length: number | null;
  readonly log_dimensionless_jerk: number | null;
  readonly joints: readonly JointSummary[];
}

export interface JointSummary {
  readonly joint: string;
  readonly least_deg: number;
  readonly most_deg: number;
  readonly speed_deg_s: number;
  /** Share of the limit, 1 is at it. */
  readonly speed_share: number;
  readonly accel_deg_s2: number;
  readonly accel_share: number;
  /** Seconds in which each of `LIMITS` held it back, and the first and last spans of them. */
  readonly limited_s: Partial<Record<keyof typeof LIMITS, number>>;
  readonly limited: readonly (Span & { readonly by: keyof typeof LIMITS })[];
}

const DEG = 180 / Math.PI;
/** Longer than this between two readings is a dropout: a quarter of the usual timeout (common practice, no source). */
export const DROPOUT_US = 60 * US_PER_MS;
/** Spans told one by one; all are counted. */
const SPANS_MAX = 50;

const WORDS_OF_LIMITS = Object.keys(LIMITS) as (keyof typeof LIMITS)[];
const WORDS_OF_BLOCKS = Object.keys(BLOCKS) as (keyof typeof BLOCKS)[];

/** Reads a take once, in bounded memory. Yields the share of its rows read. */
export function* summarize(take: Take): Generator<number, TakeSummary> {
  const { header } = take;
  const arms = header.followers.map((follower) => armWatch(follower));
  const dropouts: Span[] = [];
  let readings = 0;
  let readingUs = Number.NaN;
  let rows = 0;
  for (const row of take.readFrom(0)) {
    if (row.event === EVENT_CODES.reading || row.event === EVENT_CODES.pose) {
      readings++;
      if (row.tUs - readingUs > DROPOUT_US && dropouts.length < SPANS_MAX)
        dropouts.push({ from_s: readingUs / US_PER_S, to_s: row.tUs / US_PER_S });
      readingUs = row.tUs;
    }
    for (let f = 0; f < arms.length; f++) arms[f]?.push(row, row.followers[f] as RowFollower);
    rows++;
    if (rows % ROWS_A_STEP === 0) yield rows / take.rows;
  }
  return {
    take: take.name,
    rig: header.rig,
    made_by: header.made.by,
    parents: header.made.parents.map((parent) => parent.take),
    duration_s: take.durationUs / US_PER_S,
    rows: take.rows,
    bytes: take.bytes,
    lost_bytes: take.lostBytes,
    damaged_rows: take.damagedRows,
    marks: take.marks.map(({ name, tUs }: Mark) => ({ mark: name, t_s: tUs / US_PER_S })),
    leader: { leader: header.leader.name, joints: header.leader.joints, readings, dropouts },
    followers: arms.map((arm) => arm.end(take.durationUs)),
  };
}

/** Rows between two looks at whether somebody wants it to end. */
const ROWS_A_STEP = 20_000;

type Follower = Take['header']['followers'][number];

interface ArmWatch {
  push(row: Row, arm: RowFollower): void;
  end(endUs: number): FollowerSummary;
}

function armWatch(follower: Follower): ArmWatch {
  const { joints } = follower;
  const n = joints.length;
  const least = new Float64Array(n).fill(Number.POSITIVE_INFINITY);
  const most = new Float64Array(n).fill(Number.NEGATIVE_INFINITY);
  const speed = new Float64Array(n);
  const accel = new Float64Array(n);
  const before = new Float64Array(n);
  const limits = new Uint8Array(n);
  const since = joints.map(() => new Float64Array(WORDS_OF_LIMITS.length));
  const limitedUs = joints.map(() => new Float64Array(WORDS_OF_LIMITS.length));
  const limited = joints.map((): (Span & { by: keyof typeof LIMITS })[] => []);
  const statesUs = new Float64Array(STATES.length);
  const blockedUs = new Float64Array(WORDS_OF_BLOCKS.length);
  const moving = movements(n);
  let commands = 0;
  let commandUs = Number.NaN;
  let lastUs = Number.NaN;
  let state = 0;
  let blocks = 0;

  const noteLimits = (j: number, bits: number, tUs: number): void => {
    const was = limits[j] as number;
    for (let b = 0; b < WORDS_OF_LIMITS.length; b++) {
      const bit = 1 << b;
      if (((was ^ bits) & bit) === 0) continue;
      const begun = since[j] as Float64Array;
      if ((bits & bit) !== 0) {
        begun[b] = tUs;
        continue;
      }
      const fromUs = begun[b] as number;
      (limitedUs[j] as Float64Array)[b] = ((limitedUs[j] as Float64Array)[b] as number) + tUs - fromUs;
      const told = limited[j] as (typeof limited)[number];
      if (told.length < SPANS_MAX)
        told.push({ by: WORDS_OF_LIMITS[b] as keyof typeof LIMITS, from_s: fromUs / US_PER_S, to_s: tUs / US_PER_S });
    }
    limits[j] = bits;
  };

  return {
    push(row, arm) {
      const { tUs } = row;
      if (!Number.isNaN(lastUs)) {
        statesUs[state] = (statesUs[state] as number) + tUs - lastUs;
        for (let b = 0; b < blockedUs.length; b++)
          if ((blocks & (1 << b)) !== 0) blockedUs[b] = (blockedUs[b] as number) + tUs - lastUs;
      }
      lastUs = tUs;
      state = arm.state < STATES.length ? arm.state : 0;
      blocks = arm.blocks;
      if (arm.commanded === 0) return;
      commands++;
      const dt = (tUs - commandUs) / US_PER_S;
      for (let j = 0; j < n; j++) {
        const angle = arm.angleRad[j] as number;
        const v = arm.speedRadS[j] as number;
        if (angle < (least[j] as number)) least[j] = angle;
        if (angle > (most[j] as number)) most[j] = angle;
        if (Math.abs(v) > (speed[j] as number)) speed[j] = Math.abs(v);
        const a = Math.abs(v - (before[j] as number)) / dt;
        if (a > (accel[j] as number) && dt > 0) accel[j] = a;
        before[j] = v;
        if (limits[j] !== arm.limits[j]) noteLimits(j, arm.limits[j] as number, tUs);
      }
      moving.push(tUs, arm.speedRadS);
      commandUs = tUs;
    },
    end(endUs) {
      for (let j = 0; j < n; j++) noteLimits(j, 0, endUs);
      const found = moving.end();
      const seconds = (us: Float64Array, words: readonly string[]): Record<string, number> =>
        Object.fromEntries(words.map((word, i) => [word, (us[i] as number) / US_PER_S]).filter(([, s]) => s !== 0));
      return {
        follower: follower.name,
        commands,
        states: seconds(statesUs, STATES),
        blocked_s: seconds(blockedUs, WORDS_OF_BLOCKS),
        movements: found.length,
        spectral_arc_length: median(found, (movement) => movement.spectralArcLength),
        log_dimensionless_jerk: median(found, (movement) => movement.logDimensionlessJerk),
        joints: joints.map((joint, j) => ({
          joint: joint.name,
          least_deg: orZero(least[j] as number) * DEG,
          most_deg: orZero(most[j] as number) * DEG,
          speed_deg_s: (speed[j] as number) * DEG,
          speed_share: (speed[j] as number) / joint.speedRadS,
          accel_deg_s2: (accel[j] as number) * DEG,
          accel_share: (accel[j] as number) / joint.accelRadS2,
          limited_s: seconds(limitedUs[j] as Float64Array, WORDS_OF_LIMITS),
          limited: limited[j] ?? [],
        })),
      };
    },
  };
}

function orZero(value: number): number {
  return Number.isFinite(value) ? value : 0;
}

function median(list: readonly Movement[], of: (movement: Movement) => number): number | null {
  const sorted = list.map(of).toSorted((a, b) => a - b);
  const middle = sorted.length >> 1;
  if (sorted.length === 0) return null;
  const upper = sorted[middle] as number;
  return sorted.length % 2 === 1 ? upper : ((sorted[middle - 1] as number) + upper) / 2;
}
