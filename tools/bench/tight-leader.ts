import { US_PER_S } from '../../src/clock/clock.ts';
import type { LeaderSpec, OneEuroSpec } from '../../src/leader/spec.ts';
import { LEADER_POINTS } from './scene.ts';

export interface TightLeader {
  readonly poseRad: Float64Array;
  /** Code of each joint's health, as `PotHealth.state`. */
  readonly health: Uint8Array;
  /** flags[0]: readings are too old; flags[1]: the set of sick joints has changed by this event. */
  readonly flags: Uint8Array;
  readonly lastUs: Float64Array;
  readonly dueUs: Float64Array;
  take(nowUs: Float64Array, counts: Float64Array): void;
  /** Time has passed without a reading. */
  watch(nowUs: Float64Array): void;
}

const WINDOW = 3;
const SOUND = 0;
const RAIL = 1;
const JUMPING = 2;
const BEYOND = 3;
const SILENT = 4;
const JUMP_RAD_US = ((1000 * Math.PI) / 180) * 1e-6;
const JUMP_DT_MIN_US = 5_000;
const JUMPS = 3;

/** Decoded counts to a conditioned pose: despike, map, health, one-euro, and what is only worth a notice. */
export function tightLeader(spec: LeaderSpec): TightLeader {
  const n = spec.joints.length;
  const poseRad = new Float64Array(n).fill(Number.NaN);
  const ring = new Float64Array(n * WINDOW);
  const sorted = new Float64Array(WINDOW);
  let slot = 0;
  let count = 0;

  const xs = Float64Array.from(LEADER_POINTS, (p) => p[0]);
  const ys = Float64Array.from(LEADER_POINTS, (p) => p[1]);
  const last = xs.length - 2;
  const slopes = Float64Array.from(
    { length: last + 1 },
    (_, i) => ((ys[i + 1] as number) - (ys[i] as number)) / ((xs[i + 1] as number) - (xs[i] as number)),
  );

  const smooth = spec.joints.map((j) => j.smooth as OneEuroSpec);
  const cutoffHz = Float64Array.from(smooth, (s) => s.cutoffHz);
  const beta = Float64Array.from(smooth, (s) => s.betaHzPerRadS);
  const slopeCutoffHz = Float64Array.from(smooth, (s) => s.slopeCutoffHz);
  const value = new Float64Array(n).fill(Number.NaN);
  const slope = new Float64Array(n);
  const smoothUs = new Float64Array(n);

  const health = new Uint8Array(n).fill(SILENT);
  const symptomSinceUs = new Float64Array(n).fill(Number.NaN);
  const symptomLastUs = new Float64Array(n).fill(Number.NEGATIVE_INFINITY);
  const lastAngle = new Float64Array(n).fill(Number.NaN);
  const jumpUs = new Float64Array(n * JUMPS).fill(Number.NEGATIVE_INFINITY);
  const jumpNext = new Uint8Array(n);
  const travelLow = Float64Array.from(spec.joints, (j) => j.travelMin - 0.05 * (j.travelMax - j.travelMin));
  const travelHigh = Float64Array.from(spec.joints, (j) => j.travelMax + 0.05 * (j.travelMax - j.travelMin));

  const frozen = new Uint8Array(n);
  const before = new Float64Array(n).fill(Number.NaN);
  const changedUs = new Float64Array(n).fill(Number.NaN);
  const anchor = new Float64Array(n).fill(Number.NaN);
  const moved = Float64Array.from(spec.joints, (j) => 0.05 * (j.travelMax - j.travelMin));
  const movedUs = new Float64Array([Number.NEGATIVE_INFINITY]);
  const supplyRatio = new Float64Array([1]);
  const lastUs = new Float64Array([Number.NEGATIVE_INFINITY]);
  const flags = new Uint8Array([1, 0]);
  const dueUs = new Float64Array([Number.POSITIVE_INFINITY]);

  const watch = (nowUs: Float64Array): void => {
    const stale = (nowUs[0] as number) - (lastUs[0] as number) > spec.timeoutUs;
    flags[0] = stale ? 1 : 0;
    flags[1] = 0;
    dueUs[0] = stale ? Number.POSITIVE_INFINITY : (lastUs[0] as number) + spec.timeoutUs + 1;
  };

  const take = (nowUs: Float64Array, counts: Float64Array): void => {
    const now = nowUs[0] as number;
    const dtUs = Math.max(now - (lastUs[0] as number), JUMP_DT_MIN_US);
    lastUs[0] = now;
    watch(nowUs);
    count = count < WINDOW ? count + 1 : WINDOW;
    for (let j = 0; j < n; j++) {
      const base = j * WINDOW;
      ring[base + slot] = counts[j] as number;
      for (let k = 0; k < count; k++) {
        const raw = ring[base + k] as number;
        let place = k;
        for (; place > 0 && (sorted[place - 1] as number) > raw; place--) sorted[place] = sorted[place - 1] as number;
        sorted[place] = raw;
      }
      const clean = sorted[(count - 1) >> 1] as number;

      let i = 0;
      while (i < last && clean >= (xs[i + 1] as number)) i++;
      const angle = (ys[i] as number) + (clean - (xs[i] as number)) * (slopes[i] as number);

      if (Math.abs(angle - (lastAngle[j] as number)) > JUMP_RAD_US * dtUs) {
        jumpUs[j * JUMPS + (jumpNext[j] as number)] = now;
        jumpNext[j] = ((jumpNext[j] as number) + 1) % JUMPS;
      }
      lastAngle[j] = angle;
      const jumps = now - (jumpUs[j * JUMPS + (jumpNext[j] as number)] as number) <= US_PER_S;
      const atRail = clean <= spec.countsMin || clean >= spec.countsMax;
      const beyond = clean < (travelLow[j] as number) || clean > (travelHigh[j] as number);
      const was = health[j] as number;
      if (atRail || beyond || jumps) {
        symptomLastUs[j] = now;
        if (Number.isNaN(symptomSinceUs[j] as number)) symptomSinceUs[j] = now;
        if (jumps || now - (symptomSinceUs[j] as number) >= 100_000)
          health[j] = atRail ? RAIL : jumps ? JUMPING : BEYOND;
        value[j] = Number.NaN;
      } else {
        symptomSinceUs[j] = Number.NaN;
        if (now - (symptomLastUs[j] as number) >= US_PER_S) health[j] = SOUND;
        if (health[j] === SOUND) {
          const old = value[j] as number;
          let filtered = angle;
          if (Number.isNaN(old)) slope[j] = 0;
          else {
            const rate = US_PER_S / (now - (smoothUs[j] as number));
            const s = slope[j] as number;
            const slopeNow =
              s + (1 / (1 + rate / (2 * Math.PI * (slopeCutoffHz[j] as number)))) * ((angle - old) * rate - s);
            slope[j] = slopeNow;
            const cutoff = (cutoffHz[j] as number) + (beta[j] as number) * Math.abs(slopeNow);
            filtered = old + (1 / (1 + rate / (2 * Math.PI * cutoff))) * (angle - old);
          }
          smoothUs[j] = now;
          value[j] = filtered;
          poseRad[j] = filtered;
        }
      }
      if (health[j] !== was) flags[1] = 1;
    }
    slot = slot + 1 === WINDOW ? 0 : slot + 1;
    notice(now, counts);
  };

  const notice = (now: number, counts: Float64Array): void => {
    let low = Number.POSITIVE_INFINITY;
    let high = 0;
    let heard = 0;
    for (let j = 0; j < n; j++) {
      const ratio = (counts[j] as number) / (before[j] as number);
      if (!(ratio > 0) || !Number.isFinite(ratio)) continue;
      heard++;
      if (ratio < low) low = ratio;
      if (ratio > high) high = ratio;
    }
    if (heard >= 3 && high - low <= 0.005 && Math.abs(low - 1) >= 0.03) {
      const total = (supplyRatio[0] as number) * 0.5 * (low + high);
      supplyRatio[0] = Math.abs(total - 1) < 0.03 ? 1 : total;
    }
    for (let j = 0; j < n; j++) {
      const raw = counts[j] as number;
      if (raw !== before[j]) {
        before[j] = raw;
        changedUs[j] = now;
      }
      if (!(Math.abs(raw - (anchor[j] as number)) <= (moved[j] as number))) {
        if (!Number.isNaN(anchor[j] as number)) movedUs[0] = now;
        anchor[j] = raw;
      }
      const still = now - (changedUs[j] as number) >= 10_000_000;
      frozen[j] = still && (movedUs[0] as number) > (changedUs[j] as number) ? 1 : 0;
    }
  };

  return { poseRad, health, flags, lastUs, dueUs, take, watch };
}
