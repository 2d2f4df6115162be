import type { LeaderSpec } from './spec.ts';

/** What is wrong with a pot, worst first; `sound` is nothing. The number is the code in `PotHealth.state`. */
export const ILLS = ['sound', 'rail', 'jumping', 'beyond', 'silent'] as const;
export type Ill = (typeof ILLS)[number];

const SOUND = 0;
const RAIL = 1;
const JUMPING = 2;
const BEYOND = 3;
const SILENT = 4;

/** A symptom has to last this long before the joint is called sick (a wiper may brush a rail). */
const LASTING_US = 100_000;
/** Faster than any hand turns a joint; three such steps within a second are a bad contact. */
const JUMP_RAD_S = (1000 * Math.PI) / 180;
const JUMPS = 3;
const JUMPS_WITHIN_US = 1_000_000;
/** Stamps are no better than the port: readings of one burst may seem closer than they were taken, and faster. */
const JUMP_DT_MIN_US = 5_000;
/** How far past its travel a joint may read, as a share of the travel. */
const BEYOND_SHARE = 0.05;
/** A sick joint is sound again after this long without any symptom, so that it does not flap. */
const HEAL_US = 1_000_000;

/**
 * Health of every pot. A joint with a symptom (`suspect`) is not followed from its first bad reading on; one whose
 * symptom lasts is sick, and what it feeds holds.
 */
export interface PotHealth {
  /** Code of `ILLS` for each joint. */
  readonly state: Uint8Array;
  /** 1 while this reading's value must not be used. */
  readonly suspect: Uint8Array;
  /** Judges joint `j` at nowUs[0]. `counts` may hold NaN: no value came. `angle` is the joint's angle before smoothing, radians. */
  judge(j: number, nowUs: Float64Array, counts: Float64Array, angle: Float64Array): void;
}

export function potHealth(spec: LeaderSpec): PotHealth {
  const n = spec.joints.length;
  const state = new Uint8Array(n).fill(SILENT);
  const suspect = new Uint8Array(n).fill(1);
  const heardUs = new Float64Array(n).fill(Number.NEGATIVE_INFINITY);
  const symptomSinceUs = new Float64Array(n).fill(Number.NaN);
  const symptomLastUs = new Float64Array(n).fill(Number.NEGATIVE_INFINITY);
  const lastAngle = new Float64Array(n).fill(Number.NaN);
  const lastUs = new Float64Array(n);
  const jumpUs = new Float64Array(n * JUMPS).fill(Number.NEGATIVE_INFINITY);
  const jumpNext = new Uint8Array(n);

  // A rail is only a symptom where the measured points do not reach it.
  const railLow = Float64Array.from(spec.joints, (j) =>
    j.map.xMin <= spec.countsMin ? Number.NEGATIVE_INFINITY : spec.countsMin,
  );
  const railHigh = Float64Array.from(spec.joints, (j) =>
    j.map.xMax >= spec.countsMax ? Number.POSITIVE_INFINITY : spec.countsMax,
  );
  const slack = (j: { travelMin: number; travelMax: number }): number => BEYOND_SHARE * (j.travelMax - j.travelMin);
  const travelLow = Float64Array.from(spec.joints, (j) => j.travelMin - slack(j));
  const travelHigh = Float64Array.from(spec.joints, (j) => j.travelMax + slack(j));

  const countJump = (j: number, nowUs: Float64Array, angle: Float64Array): void => {
    const tUs = nowUs[0] as number;
    const now = angle[j] as number;
    const dtUs = Math.max(tUs - (lastUs[j] as number), JUMP_DT_MIN_US);
    const step = Math.abs(now - (lastAngle[j] as number));
    if (step > JUMP_RAD_S * dtUs * 1e-6) {
      jumpUs[j * JUMPS + (jumpNext[j] as number)] = tUs;
      jumpNext[j] = ((jumpNext[j] as number) + 1) % JUMPS;
    }
    lastAngle[j] = now;
    lastUs[j] = tUs;
  };

  const jumping = (j: number, nowUs: Float64Array): boolean =>
    // The slot to be overwritten next holds the oldest of the last three jumps.
    (nowUs[0] as number) - (jumpUs[j * JUMPS + (jumpNext[j] as number)] as number) <= JUMPS_WITHIN_US;

  return {
    state,
    suspect,
    judge(j, nowUs, counts, angle) {
      const tUs = nowUs[0] as number;
      const value = counts[j] as number;
      if (Number.isNaN(value)) {
        suspect[j] = 1;
        if (tUs - (heardUs[j] as number) > spec.timeoutUs) {
          state[j] = SILENT;
          symptomLastUs[j] = tUs;
        }
        return;
      }
      heardUs[j] = tUs;
      countJump(j, nowUs, angle);
      const atRail = value <= (railLow[j] as number) || value >= (railHigh[j] as number);
      const beyond = value < (travelLow[j] as number) || value > (travelHigh[j] as number);
      const jumps = jumping(j, nowUs);
      if (!atRail && !beyond && !jumps) {
        suspect[j] = 0;
        symptomSinceUs[j] = Number.NaN;
        if (tUs - (symptomLastUs[j] as number) >= HEAL_US) state[j] = SOUND;
        return;
      }
      suspect[j] = 1;
      symptomLastUs[j] = tUs;
      if (Number.isNaN(symptomSinceUs[j] as number)) symptomSinceUs[j] = tUs;
      if (jumps || tUs - (symptomSinceUs[j] as number) >= LASTING_US)
        state[j] = atRail ? RAIL : jumps ? JUMPING : BEYOND;
    },
  };
}
