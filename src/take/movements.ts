import { US_PER_S } from '../clock/clock.ts';
import { logDimensionlessJerk, spectralArcLength } from './smoothness.ts';

/** One movement of an arm, from standing to standing. */
export interface Movement {
  readonly fromUs: number;
  readonly toUs: number;
  readonly spectralArcLength: number;
  readonly logDimensionlessJerk: number;
}

/** Finds the movements in a stream of joint speeds, in bounded memory. */
export interface Movements {
  /** @param tUs never goes back */
  push(tUs: number, speedRadS: Float64Array): void;
  end(): readonly Movement[];
}

/** The rate at which smoothness is told (as in the publication's examples). */
const RATE_HZ = 100;
const PERIOD_US = US_PER_S / RATE_HZ;
/** Slower than this an arm counts as standing, rad/s: about a degree a second. */
const STANDING_RAD_S = 0.02;
/** A movement's ends are where its speed passes this share of its peak (common practice, no source). */
const ENDS_SHARE = 0.05;
/** A moving arm is commanded far more often than this. */
const PAUSE_US = US_PER_S;
/** Shorter ones are twitches: their spectrum says nothing. */
const SAMPLES_MIN = 20;
/** An arm that never stands is judged in stretches of a minute. */
const SAMPLES_MAX = 60 * RATE_HZ;
/** Movements kept for the medians; later ones take the place of earlier ones in turn. */
const KEPT_MAX = 20_000;

/** Speed of the arm as a whole is the root of the sum of its joints' squares. */
export function movements(joints: number): Movements {
  const samples = new Float64Array(SAMPLES_MAX);
  const found: Movement[] = [];
  let count = 0;
  let met = 0;
  let lastUs = Number.NaN;
  let last = 0;
  let nextUs = Number.NaN;

  const close = (endUs: number): void => {
    const speed = trimmed(samples.subarray(0, count));
    if (speed.length >= SAMPLES_MIN) {
      found[met % KEPT_MAX] = {
        fromUs: endUs - count * PERIOD_US,
        toUs: endUs,
        spectralArcLength: spectralArcLength(speed, RATE_HZ),
        logDimensionlessJerk: logDimensionlessJerk(speed, RATE_HZ),
      };
      met++;
    }
    count = 0;
  };

  const sample = (tUs: number, speed: number): void => {
    if (speed < STANDING_RAD_S) {
      if (count > 0) close(tUs);
      return;
    }
    samples[count++] = speed;
    if (count === SAMPLES_MAX) close(tUs);
  };

  return {
    push(tUs, speedRadS) {
      let sum = 0;
      for (let j = 0; j < joints; j++) sum += (speedRadS[j] as number) ** 2;
      const now = Math.sqrt(sum);
      if (Number.isNaN(lastUs)) nextUs = tUs;
      // A pause in the commands is an arm that stands: none of its samples is worth taking one by one. So is one in the
      // middle of a movement, where a clock jumped: nobody knows what happened in it.
      const isPause = (last < STANDING_RAD_S && now < STANDING_RAD_S) || tUs - lastUs > PAUSE_US;
      if (isPause) {
        if (count > 0) close(lastUs);
        nextUs = tUs;
      }
      for (; nextUs <= tUs; nextUs += PERIOD_US) {
        const share = tUs === lastUs || Number.isNaN(lastUs) ? 1 : (nextUs - lastUs) / (tUs - lastUs);
        sample(nextUs, last + share * (now - last));
      }
      lastUs = tUs;
      last = now;
    },
    end() {
      if (count > 0) close(lastUs);
      return found;
    },
  };
}

function trimmed(speed: Float64Array): Float64Array {
  const peak = speed.reduce((top, value) => Math.max(top, value), 0);
  let first = 0;
  while (first < speed.length && (speed[first] as number) < ENDS_SHARE * peak) first++;
  let end = speed.length;
  while (end > first && (speed[end - 1] as number) < ENDS_SHARE * peak) end--;
  return speed.subarray(first, end);
}
