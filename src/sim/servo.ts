import { US_PER_S } from '../clock/clock.ts';
import type { PointMap } from '../map/points.ts';

/**
 * One hobby servo as it is, not as one wishes: it tells nothing, runs to its first pulse at full speed, ignores
 * small changes, has play, and sinks when nothing drives it.
 *
 * Between two events the driven side moves straight to its goal at constant speed, so the state at any instant
 * is computed exactly when it is asked for: a servo needs no wake-ups.
 * Non-goals: inertia, load-dependent speed, the few milliseconds a real one takes to start and to settle.
 * All instants are microseconds of one clock and never go back.
 */
export interface Servo {
  /** The board's pulse from its next refresh on, in microseconds; NaN ends the pulses. */
  setPulse(atUs: number, pulseUs: number): void;
  /** Pulses move nothing without power. */
  setPower(atUs: number, on: boolean): void;
  /** True angle of the horn, in radians of the servo's map. */
  angleRad(atUs: number): number;
  /** Pulse the servo gets now; NaN without pulses. */
  pulseUs(atUs: number): number;
  /** Highest speed of the horn since the start or `forgetSpeed`, as a mean over one refresh period. */
  speedMaxRadS(atUs: number): number;
  forgetSpeed(atUs: number): void;
}

export interface ServoOptions {
  /** Radians of the servo to microseconds. */
  readonly map: PointMap;
  /** Where the horn stands before anything drives it; the bridge cannot know. */
  readonly startRad: number;
  /** Where gravity takes it. */
  readonly sagRad: number;
  /** 60 degrees in 0.2 s, 300 deg/s, when absent: the usual data-sheet figure (common practice, no source). */
  readonly speedRadS?: number;
  /** 60 deg/s when absent: a gear train sinks, it does not drop (common practice, no source). */
  readonly sagRadS?: number;
  /** 4 us when absent (common practice, no source). */
  readonly deadbandUs?: number;
  /** Whole play between shaft and horn; 1 degree when absent (common practice, no source). */
  readonly backlashRad?: number;
  /** Goes on holding the last pulse's angle when pulses end, as many digital servos do; false when absent. */
  readonly holdsLostPulse?: boolean;
}

/** Arduino's servo library sends each pulse every 20 ms (Servo.h, REFRESH_INTERVAL 20000). */
export const REFRESH_US = 20_000;

/** Rounding of angles must not make a change of exactly the deadband count as more. */
const ROUNDING_US = 1e-6;

const DEG = Math.PI / 180;

type Driver = 'motor' | 'gravity';

export function servo(options: ServoOptions, startUs: number): Servo {
  const { map, startRad, sagRad } = options;
  const speedRadS = options.speedRadS ?? 300 * DEG;
  const sagRadS = options.sagRadS ?? 60 * DEG;
  const deadbandUs = options.deadbandUs ?? 4;
  const play = (options.backlashRad ?? DEG) / 2;
  const holdsLostPulse = options.holdsLostPulse ?? false;
  const usPerRad = (map.yMax - map.yMin) / (map.xMax - map.xMin);

  let nowUs = startUs;
  /** The gear train's last wheel, which the servo's own pot measures; the horn hangs on it with play. */
  let shaft = startRad;
  let horn = startRad;
  let driver: Driver = 'gravity';
  let goalRad = sagRad;
  let powered = true;
  let pulseUs = Number.NaN;
  let comingUs = Number.NaN;
  let refreshAtUs = Number.POSITIVE_INFINITY;
  let spanEndUs = startUs + REFRESH_US;
  let spanStartRad = startRad;
  let speedMax = 0;

  const move = (dtUs: number): void => {
    if (driver === 'motor') {
      shaft = towards(shaft, goalRad, (speedRadS * dtUs) / US_PER_S);
      horn = within(horn, shaft, play);
    } else {
      horn = towards(horn, goalRad, (sagRadS * dtUs) / US_PER_S);
      shaft = within(shaft, horn, play);
    }
  };

  const glide = (untilUs: number): void => {
    while (nowUs < untilUs) {
      const stepUs = Math.min(untilUs, spanEndUs) - nowUs;
      move(stepUs);
      nowUs += stepUs;
      if (nowUs < spanEndUs) return;
      speedMax = Math.max(speedMax, (Math.abs(horn - spanStartRad) * US_PER_S) / REFRESH_US);
      spanStartRad = horn;
      // At its goal nothing will move before the next event: whole spans of standing still are skipped.
      const standing = (driver === 'motor' ? shaft : horn) === goalRad;
      const spans = standing ? Math.floor((untilUs - nowUs) / REFRESH_US) : 0;
      nowUs += spans * REFRESH_US;
      spanEndUs = nowUs + REFRESH_US;
    }
  };

  const react = (): void => {
    if (powered && !Number.isNaN(pulseUs)) {
      const wishRad = map.inverse(pulseUs);
      const running = driver === 'motor' && shaft !== goalRad;
      if (running || Math.abs(wishRad - shaft) * usPerRad > deadbandUs + ROUNDING_US) goalRad = wishRad;
      else if (driver === 'gravity') goalRad = shaft;
      driver = 'motor';
    } else if (!(powered && holdsLostPulse && driver === 'motor')) {
      driver = 'gravity';
      goalRad = sagRad;
    }
  };

  const advance = (toUs: number): void => {
    if (refreshAtUs <= toUs) {
      glide(refreshAtUs);
      pulseUs = comingUs;
      refreshAtUs = Number.POSITIVE_INFINITY;
      react();
    }
    glide(toUs);
  };

  return {
    setPulse(atUs, nextUs) {
      advance(atUs);
      comingUs = nextUs;
      if (refreshAtUs === Number.POSITIVE_INFINITY) {
        refreshAtUs = startUs + REFRESH_US * (Math.floor((atUs - startUs) / REFRESH_US) + 1);
      }
    },
    setPower(atUs, on) {
      advance(atUs);
      powered = on;
      react();
    },
    angleRad(atUs) {
      advance(atUs);
      return horn;
    },
    pulseUs(atUs) {
      advance(atUs);
      return pulseUs;
    },
    speedMaxRadS(atUs) {
      advance(atUs);
      return speedMax;
    },
    forgetSpeed(atUs) {
      advance(atUs);
      speedMax = 0;
      spanStartRad = horn;
      spanEndUs = nowUs + REFRESH_US;
    },
  };
}

function towards(from: number, to: number, stepMax: number): number {
  return Math.abs(to - from) <= stepMax ? to : from + Math.sign(to - from) * stepMax;
}

function within(value: number, centre: number, half: number): number {
  return Math.min(centre + half, Math.max(centre - half, value));
}
