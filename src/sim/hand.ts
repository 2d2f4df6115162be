import { US_PER_S } from '../clock/clock.ts';
import { noiseAt, random } from './random.ts';

/**
 * A hand on a leader: lies still, then reaches, pauses and reaches again, trembling all the while, read by a
 * converter that is noisy and whole-numbered.
 *
 * Goal: whatever conditions readings meets here what it will meet on a desk.
 * Non-goal: the mechanics of a human arm; joints follow straight min-jerk paths of their own.
 */
export interface SimulatedHand {
  /**
   * Writes the counts read `tUs` microseconds after the hand's start, one an input, whole and inside the converter.
   * A pure function of the options and `tUs`; cheapest when `tUs` does not go back.
   */
  countsAt(tUs: number, out: Float64Array): void;
}

export interface HandOptions {
  readonly seed: number;
  /** What the converter can read. */
  readonly countsMin: number;
  readonly countsMax: number;
  readonly inputs: readonly HandInput[];
  /** Lying still before the first reach; 1 s when absent. */
  readonly stillUs?: number;
  /** Root mean square of the tremor; 0.1 degrees when absent, which peaks at about 0.3. */
  readonly tremorRad?: number;
  /** Root mean square of the converter's noise; 0.7 counts when absent. */
  readonly noiseCounts?: number;
}

export type HandInput =
  | {
      readonly kind: 'joint';
      /** What the joint really reaches, in counts. */
      readonly travelMin: number;
      readonly travelMax: number;
      readonly restCounts: number;
      /** Turns the tremor, which is an angle, into counts. */
      readonly countsPerRad: number;
    }
  /** Nobody presses it: it stays at `restCounts`. */
  | { readonly kind: 'button'; readonly restCounts: number };

const STILL_US = US_PER_S;
const TREMOR_RAD = (0.1 * Math.PI) / 180;
const NOISE_COUNTS = 0.7;

/** Unhurried reaches and the pauses between (common practice, no source). */
const REACH_S = [0.6, 2] as const;
const DWELL_S = [0.3, 1.5] as const;
/** Share of the travel left free at each end: hands keep away from the stops. */
const MARGIN = 0.15;
/** Share of the travel a reach covers in a second at most, so that short reaches are small ones. */
const STRETCH_PER_S = 0.25;
/** Share of the travel that a reach moves a joint at least: less could not be told from tremor. */
const LEAST = 0.1;
/** Chance that a joint takes part in a reach, beyond the one that leads it; the first reach moves them all. */
const TAKES_PART = 0.75;

/** Band of physiological tremor: Elble and Randall, J. Neurophysiol. 39 (1976) 370-383 (from memory). */
const TREMOR_HZ = [8, 12] as const;
/** Tones that beat against each other, as tremor waxes and wanes. */
const TONES = 6;
/** The tremor comes in as the hand takes hold. */
const GRASP_US = 500_000;

const REACHES = 0;
const TREMOR = 1;

export function simulatedHand(options: HandOptions): SimulatedHand {
  const { seed, inputs, countsMin, countsMax } = options;
  const stillUs = options.stillUs ?? STILL_US;
  const noiseCounts = options.noiseCounts ?? NOISE_COUNTS;
  const reaching = reaches(seed, inputs, stillUs);
  const trembling = tremor(seed, inputs, options.tremorRad ?? TREMOR_RAD);

  return {
    countsAt(tUs, out) {
      const share = reaching.shareAt(tUs);
      const grasp = Math.min(1, Math.max(0, (tUs - stillUs) / GRASP_US));
      for (let i = 0; i < inputs.length; i++) {
        const steady = reaching.counts(i, share) + grasp * trembling(i, tUs);
        const read = Math.round(steady + noiseCounts * noiseAt(seed, tUs, i));
        out[i] = Math.min(countsMax, Math.max(countsMin, read));
      }
    },
  };
}

/**
 * Path of a minimum-jerk reach: share of the way done at share `u` of the time, 0 to 1.
 * T. Flash and N. Hogan, "The Coordination of Arm Movements", J. Neurosci. 5 (1985) 1688-1703.
 */
export function minimumJerk(u: number): number {
  return u * u * u * (10 + u * (-15 + 6 * u));
}

interface Reaches {
  /** Goes on to the reach that holds `tUs`; returns the share of its way done then. */
  shareAt(tUs: number): number;
  /** Counts of an input at that share of the present reach. */
  counts(input: number, share: number): number;
}

function reaches(seed: number, inputs: readonly HandInput[], stillUs: number): Reaches {
  const from = new Float64Array(inputs.length);
  const to = new Float64Array(inputs.length);
  const joints = inputs.flatMap((input, i) => (input.kind === 'joint' ? [i] : []));
  let chance = random(seed, REACHES);
  let startUs = 0;
  let reachUs = 0;
  let endUs = 0;

  const rewind = (): void => {
    chance = random(seed, REACHES);
    startUs = 0;
    reachUs = 0;
    endUs = stillUs;
    for (let i = 0; i < inputs.length; i++) {
      from[i] = (inputs[i] as HandInput).restCounts;
      to[i] = (inputs[i] as HandInput).restCounts;
    }
  };

  const next = (): void => {
    const first = reachUs === 0;
    startUs = endUs;
    from.set(to);
    reachUs = Math.round(chance.between(REACH_S[0], REACH_S[1]) * US_PER_S);
    endUs = startUs + reachUs + Math.round(chance.between(DWELL_S[0], DWELL_S[1]) * US_PER_S);
    const leads = Math.floor(chance.between(0, joints.length));
    for (let j = 0; j < joints.length; j++) {
      const i = joints[j] as number;
      const takesPart = chance.uniform() < TAKES_PART || j === leads || first;
      const goal = aim(inputs[i] as HandInput, from[i] as number, reachUs / US_PER_S, chance.uniform());
      if (takesPart) to[i] = goal;
    }
  };

  rewind();
  return {
    shareAt(tUs) {
      if (tUs < startUs) rewind();
      while (tUs >= endUs) next();
      return tUs >= startUs + reachUs ? 1 : minimumJerk((tUs - startUs) / reachUs);
    },
    counts: (input, share) => (from[input] as number) + share * ((to[input] as number) - (from[input] as number)),
  };
}

/** Where a reach of `seconds` takes a joint: anywhere comfortable, as far as that time allows. */
function aim(input: HandInput, fromCounts: number, seconds: number, chance: number): number {
  if (input.kind === 'button') return input.restCounts;
  const travel = input.travelMax - input.travelMin;
  const stretch = STRETCH_PER_S * seconds * travel;
  const way = input.travelMin + travel * (MARGIN + (1 - 2 * MARGIN) * chance) - fromCounts;
  if (Math.abs(way) >= LEAST * travel) return fromCounts + Math.min(stretch, Math.max(-stretch, way));
  return fromCounts + (fromCounts < input.travelMin + travel / 2 ? LEAST : -LEAST) * travel;
}

/** Tremor in counts of an input at an instant: a few tones of the band with phases of their own. */
function tremor(seed: number, inputs: readonly HandInput[], rmsRad: number): (input: number, tUs: number) => number {
  const chance = random(seed, TREMOR);
  const omegaPerUs = new Float64Array(inputs.length * TONES);
  const phase = new Float64Array(inputs.length * TONES);
  for (let k = 0; k < phase.length; k++) {
    omegaPerUs[k] = (2 * Math.PI * chance.between(TREMOR_HZ[0], TREMOR_HZ[1])) / US_PER_S;
    phase[k] = chance.between(0, 2 * Math.PI);
  }
  // A sine's rms is its amplitude over the root of two; tones of unlike frequency add as squares.
  const amplitudes = Float64Array.from(inputs, (input) =>
    input.kind === 'joint' ? rmsRad * Math.abs(input.countsPerRad) * Math.sqrt(2 / TONES) : 0,
  );
  return (input, tUs) => {
    let sum = 0;
    for (let k = input * TONES; k < (input + 1) * TONES; k++) {
      sum += Math.sin((omegaPerUs[k] as number) * tUs + (phase[k] as number));
    }
    return (amplitudes[input] as number) * sum;
  };
}
