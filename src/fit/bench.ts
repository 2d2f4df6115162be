import type { RigProfiles } from '../rig/compile.ts';
import type { LeaderJoint } from '../rig/schema/leader.ts';
import { servosOf } from '../rig/servo-list.ts';
import {
  attemptOf,
  byJoint,
  type Capture,
  type CaptureStep,
  emptyCapture,
  type JointCaptures,
  nothingYet,
} from './captures.ts';
import { assumedNoise, noiseOf } from './noise.ts';
import type { Prompt, SessionEffect, SessionEvent } from './prompt.ts';
import { type Hold, judgeHold } from './stillness.ts';
import { holdWords } from './words.ts';

/** A step of a session as a coroutine: it hands out prompts, is handed events, and returns when it is done. */
export type Step<T = void> = Generator<Prompt, T, SessionEvent>;

/** How a step ended: what was found, in words, and whether there is anything to show for it. */
export interface Outcome {
  readonly done: boolean;
  readonly lines: readonly string[];
}

export const done = (lines: readonly string[]): Outcome => ({ done: true, lines });
export const undone = (line: string): Outcome => ({ done: false, lines: [line] });

/** What the steps share: the rig, what was captured so far, and the way out. */
export interface Bench {
  readonly profiles: RigProfiles;
  readonly captures: Capture[];
  readonly effects: SessionEffect[];
  /** Followers that are awake. */
  readonly awake: Set<number>;
  /** Followers whose operator has said that horns are off or arms held. */
  readonly cleared: Set<number>;
  /** Input of each leader joint, as wired; the profile's until the wiring step says otherwise. */
  readonly inputOf: number[];
  /** The servo that stands where it was jogged; null: none. */
  away: { readonly follower: number; readonly servo: number } | null;
}

export interface BenchServo {
  readonly follower: number;
  readonly servo: number;
  readonly arm: string;
  readonly joint: string;
  readonly channel: number;
  readonly lowUs: number;
  readonly highUs: number;
  readonly middleUs: number;
}

/** Every servo of the rig that turns one joint alone; others cannot be measured at the joint. */
export function benchServos({ followers }: RigProfiles): readonly BenchServo[] {
  return followers.flatMap((profile, follower) =>
    servosOf(profile).flatMap(({ servo: { channel, points }, turns }, servo): BenchServo[] => {
      const [joint, ...more] = Object.keys(turns);
      if (joint === undefined || more.length > 0) return [];
      const pulses = points.map(([, us]) => us);
      const [lowUs, highUs] = [Math.min(...pulses), Math.max(...pulses)];
      return [
        { follower, servo, arm: profile.follower, joint, channel, lowUs, highUs, middleUs: (lowUs + highUs) / 2 },
      ];
    }),
  );
}

export function prompt(lines: readonly string[], ask: string | null = null): Prompt {
  return { lines, ask, tape: null };
}

/** Asks until an answer comes; readings and motions meanwhile do not matter. */
export function* answer(asked: Prompt): Step<string> {
  for (let shown = asked; ; shown = { ...asked, lines: [] }) {
    const event = yield shown;
    if (event.kind === 'line') return event.text.trim();
  }
}

/** Asks until a number comes, or nothing. */
export function* numberOrNothing(asked: Prompt): Step<number | null> {
  for (let shown = asked; ; shown = prompt(['That is no number. Write it with a point, such as 12.5.'], asked.ask)) {
    const text = yield* answer(shown);
    if (text === '') return null;
    const value = Number(text.replace(/\s*(deg|us)$/, ''));
    if (Number.isFinite(value)) return value;
  }
}

/** Half a second at the usual hundred readings a second. */
const HOLD_READINGS = 50;
/** A hand that has not come to rest in two seconds holds on to nothing. */
const HOLD_TRIES = 4;
/** Nearer to an end of the converter's range, a reading is no measure. */
const RAIL_COUNTS = 1;

/** Takes readings of one input, as they come. Lines meanwhile are not heard. */
function* readings(shown: Prompt, input: number, n: number): Step<readonly number[]> {
  const counts: number[] = [];
  for (let now = shown; counts.length < n; now = { ...shown, lines: [] }) {
    const event = yield now;
    const count = event.kind === 'reading' ? (event.counts[input] as number) : Number.NaN;
    if (!Number.isNaN(count)) counts.push(count);
  }
  return counts;
}

/** One hold of a leader joint: waits until it is still, but not for ever. */
export function* hold(bench: Bench, joint: number): Step<Hold> {
  let found = yield* heldFor(bench, joint, ['Hold still ...']);
  for (let tries = 1; !found.still && found.why !== 'rail' && tries < HOLD_TRIES; tries++)
    found = yield* heldFor(bench, joint, []);
  return found;
}

function* heldFor(bench: Bench, joint: number, lines: readonly string[]): Step<Hold> {
  const counts = yield* readings(prompt(lines), bench.inputOf[joint] as number, HOLD_READINGS);
  const found = judgeHold(counts, restNoise(bench, joint));
  const [lowest, highest] = bench.profiles.leader.counts;
  // At a rail nothing is measured: the pot is beyond its end, or the wiper has lost its track.
  const isRail = found.still && (found.mean <= lowest + RAIL_COUNTS || found.mean >= highest - RAIL_COUNTS);
  return isRail ? { still: false, why: 'rail', n: found.n } : found;
}

export function holdRefused(found: Exclude<Hold, { still: true }>): string {
  return `Not taken: ${holdWords(found)}.`;
}

/** The joint's noise at rest, in counts; a usual pot's before it was measured. */
function restNoise(bench: Bench, joint: number): number {
  const { leader } = bench.profiles;
  const still = capturesOf(bench, leader.leader, (leader.joints[joint] as LeaderJoint).name).of['leader-still'];
  const [lowest, highest] = leader.counts;
  return still.length < 2 ? assumedNoise(highest - lowest) : noiseOf(still.map(({ counts }) => counts)).counts;
}

export function capturesOf(bench: Bench, arm: string, joint: string): JointCaptures {
  const found = byJoint(bench.captures).find((group) => group.arm === arm && group.joint === joint);
  return found ?? { arm, joint, of: nothingYet() };
}

/** Number of a new attempt at a step. */
export function nextAttempt(bench: Bench, step: CaptureStep, arm: string, joint: string): number {
  const same = bench.captures.filter((c) => c.step === step && c.arm === arm && c.joint === joint);
  return Math.max(0, ...same.map(attemptOf)) + 1;
}

export function keep(bench: Bench, captures: readonly Capture[]): void {
  bench.captures.push(...captures);
  bench.effects.push({ kind: 'keep', captures });
}

/** A capture of a leader joint, with the channel if wiring found it on another one. */
export function leaderCapture(bench: Bench, step: CaptureStep, joint: number): Capture {
  const { leader } = bench.profiles;
  const input = bench.inputOf[joint] as number;
  const { name } = leader.joints[joint] as LeaderJoint;
  const moved = input !== joint;
  const channel = moved ? channelOfInput(bench, input) : Number.NaN;
  return { ...emptyCapture(step, leader.leader, name), channel };
}

export function channelOfInput({ profiles: { leader } }: Bench, input: number): number {
  return [...leader.joints, ...leader.buttons][input]?.channel ?? Number.NaN;
}
