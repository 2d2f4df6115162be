import type { FollowerJointSpec, ServoSpec } from '../follower/spec.ts';
import type { LeaderJointSpec } from '../leader/spec.ts';
import type { PointMap } from '../map/points.ts';
import { outputWiring } from '../rig/compile-follower.ts';
import { degreesOf } from '../rig/units.ts';
import { commandsOf, wireChoice } from '../rig/wire-choice.ts';
import { WIRE_ABILITIES } from '../wire/abilities.ts';
import { templateOf } from '../wire/lines-commands.ts';
import type { FollowerSubject, LeaderSubject } from './subject.ts';

/**
 * The chain from a count to the tip: what each link of it does to one joint, in degrees of that joint. Null where the
 * file gives no data, or the profile is looked at alone.
 */
export interface Resolution {
  /** One step of the converter, at the steepest place of the pot's map. */
  readonly count_deg: number | null;
  /** The noise of rounding to steps: a step / sqrt 12, root mean square (W. Kester, Analog Devices MT-001). */
  readonly quantisation_deg: number | null;
  /** The pot's noise as `noise_counts` gives it, never less than that of rounding; root mean square. */
  readonly noise_deg: number | null;
  /** What smoothing leaves of it while the hand is still. */
  readonly smoothed_deg: number | null;
  /** Motion that the remap swallows. */
  readonly deadband_deg: number;
  /** One step of the pulse, or of the angle, as the wire writes it. */
  readonly wire_deg: number | null;
  /** The servo's own deadband. */
  readonly servo_deg: number;
}

/** The same at the tip, at most, and which of it is worst. */
export interface TipResolution {
  readonly mm_per_count: number | null;
  readonly noise_mm: number | null;
  readonly smoothed_mm: number | null;
  readonly deadband_mm: number | null;
  readonly wire_mm: number | null;
  readonly servo_mm: number | null;
  readonly resolution_worst: (typeof LINKS)[number] | null;
}

/** What can be worst, in the order of the chain: of noise, what is left after smoothing. */
const LINKS = ['count', 'noise', 'deadband', 'wire', 'servo'] as const;

/** Places along a map at which its slope is looked at. */
const PLACES = 256;

export function resolutionOf(subject: FollowerSubject, j: number): Resolution {
  const { profile, spec, leader } = subject;
  const joint = spec.joints[j] as FollowerJointSpec;
  // A joint that reaches for a tip copies no pot.
  const reaches = spec.whole?.tip?.reaching.includes(j) === true;
  const servos = spec.servos.map((servo, index) => ({ servo, index, weight: weightOf(servo, j) }));
  const turning = servos.filter(({ weight }) => weight !== 0);
  const servoRad = turning.map(({ servo, weight }) => (servo.deadbandUs * radPerUs(servo.map)) / Math.abs(weight));
  const wireRad = turning.map(({ servo, index, weight }) => wireStepRad(profile, index, j, servo, weight));
  return {
    ...(reaches ? NO_POT : potChain(joint, leader)),
    deadband_deg: degreesOf(joint.deadbandRad),
    wire_deg: wireRad.includes(null) ? null : degreesOf(Math.max(...wireRad.map((step) => step ?? 0))),
    servo_deg: degreesOf(Math.max(...servoRad)),
  };
}

/** @param leverMm farthest that the tip can be from the joint's axis; null where that is not known */
export function atTheTip(resolution: Resolution, leverMm: number | null): TipResolution {
  const mm = (degrees: number | null): number | null =>
    degrees === null || leverMm === null ? null : (degrees * Math.PI * leverMm) / 180;
  const steps = [
    resolution.count_deg,
    resolution.smoothed_deg,
    resolution.deadband_deg,
    resolution.wire_deg,
    resolution.servo_deg,
  ];
  const largest = Math.max(...steps.map((step) => step ?? 0));
  return {
    mm_per_count: mm(resolution.count_deg),
    noise_mm: mm(resolution.noise_deg),
    smoothed_mm: mm(resolution.smoothed_deg),
    deadband_mm: mm(resolution.deadband_deg),
    wire_mm: mm(resolution.wire_deg),
    servo_mm: mm(resolution.servo_deg),
    resolution_worst: largest > 0 ? (LINKS[steps.indexOf(largest)] ?? null) : null,
  };
}

type PotChain = Pick<Resolution, 'count_deg' | 'quantisation_deg' | 'noise_deg' | 'smoothed_deg'>;

const NO_POT: PotChain = { count_deg: null, quantisation_deg: null, noise_deg: null, smoothed_deg: null };

/** From the pots that feed a joint. Their noises are independent: squares add up. */
function potChain({ sources, gain }: FollowerJointSpec, leader: LeaderSubject | null): PotChain {
  if (leader === null || sources.length === 0) return NO_POT;
  const { profile, spec } = leader;
  let count = 0;
  let quantised = 0;
  let noisy = 0;
  let smoothed = 0;
  for (const { joint, weight } of sources) {
    const source = spec.joints[joint];
    if (source === undefined) return NO_POT;
    const step = degreesOf(Math.abs(gain * weight) * radPerCount(source));
    const rounding = step / Math.sqrt(12);
    const noise = Math.max(rounding, step * (profile.joints[joint]?.noise_counts ?? 0));
    count = Math.max(count, step);
    quantised += rounding ** 2;
    noisy += noise ** 2;
    smoothed += (noise * keptBySmoothing(source, profile.sampling_ms)) ** 2;
  }
  const [quantisation_deg, noise_deg, smoothed_deg] = [quantised, noisy, smoothed].map(Math.sqrt) as [
    number,
    number,
    number,
  ];
  return { count_deg: count, quantisation_deg, noise_deg, smoothed_deg };
}

/**
 * Share of white noise that the one-euro filter leaves while the hand is still: it is then an exponential average with
 * the share a = 1 / (1 + rate / (2 pi cutoff)) (Casiez, Roussel, Vogel, CHI 2012), which leaves sqrt(a / (2 - a)) of
 * it. The median against spikes is not counted.
 */
function keptBySmoothing({ smooth }: LeaderJointSpec, samplingMs: number): number {
  if (smooth === null) return 1;
  const rateHz = 1000 / samplingMs;
  const share = 1 / (1 + rateHz / (2 * Math.PI * smooth.cutoffHz));
  return Math.sqrt(share / (2 - share));
}

/** Radians of one step of the converter, at the steepest place of the travel. */
export function radPerCount({ map, travelMin, travelMax }: LeaderJointSpec): number {
  return steepest((counts) => map.value(counts), travelMin, travelMax);
}

function radPerUs(map: PointMap): number {
  return steepest((pulseUs) => map.inverse(pulseUs), map.yMin, map.yMax);
}

function steepest(value: (x: number) => number, from: number, to: number): number {
  const step = (to - from) / PLACES;
  let most = 0;
  for (let place = 0; place < PLACES; place++) {
    const at = from + place * step;
    most = Math.max(most, Math.abs(value(at + step) - value(at)) / step);
  }
  return most;
}

function weightOf({ turns }: ServoSpec, j: number): number {
  return turns.find(({ joint }) => joint === j)?.weight ?? 0;
}

/** On lines, what the template's decimals leave: a board that is told degrees rounds the pulse itself, as nobody here knows. */
function wireStepRad(
  profile: FollowerSubject['profile'],
  servo: number,
  joint: number,
  { map }: ServoSpec,
  weight: number,
): number | null {
  const perUs = radPerUs(map) / Math.abs(weight);
  const { name } = wireChoice(profile.wire);
  if (name !== 'lines') return WIRE_ABILITIES[name].stepUs * perUs;
  const commands = commandsOf(profile.wire);
  const wiring = outputWiring(profile);
  const template = commands === null || wiring === null ? null : templateOf(commands, wiring);
  if (template === null || template.kind === 'mistake') return null;
  const steps = template.fields.flatMap(({ unit, index, decimals }) => {
    if (unit === 'us') return index === servo ? [10 ** -decimals * perUs] : [];
    return index === joint ? [(10 ** -decimals * Math.PI) / 180] : [];
  });
  return steps.length === 0 ? null : Math.min(...steps);
}
