/** What a measuring session records; a row of captures.csv. In the units of files: counts, microseconds, degrees. */
export interface Capture {
  readonly step: CaptureStep;
  /** Name of the leader or of a follower. */
  readonly arm: string;
  readonly joint: string;
  /** NaN where the step has no such value. */
  readonly counts: number;
  readonly pulseUs: number;
  readonly knownDeg: number;
  /** Since the session began, milliseconds; NaN: not recorded. */
  readonly tMs: number;
  /** Of a hold that was averaged: its standard deviation in counts; NaN: a single reading. */
  readonly noiseCounts: number;
  /** Of a fine step: 1 if the horn was seen to move, 0 if it stood; NaN: not a step. */
  readonly moved: number;
  /** Channel of the board it was read from; NaN: the profile's. */
  readonly channel: number;
  /** A step that is done anew has a higher number, and its captures replace the former ones; NaN: the first. */
  readonly attempt: number;
}

/** Steps and what each row of them has to hold. */
export const CAPTURE_STEPS = {
  'leader-still': ['counts'],
  'leader-sweep': ['counts'],
  'leader-point': ['counts', 'known_deg'],
  'servo-point': ['pulse_us', 'known_deg'],
  'servo-step': ['pulse_us', 'moved'],
  match: ['counts', 'pulse_us'],
} as const;

export type CaptureStep = keyof typeof CAPTURE_STEPS;

export const CAPTURE_COLUMNS = [
  'step',
  'arm',
  'joint',
  'counts',
  'pulse_us',
  'known_deg',
  't_ms',
  'noise_counts',
  'moved',
  'channel',
  'attempt',
] as const;

/** The captures of one joint, step by step, in the order in which they were made. */
export interface JointCaptures {
  readonly arm: string;
  readonly joint: string;
  readonly of: Readonly<Record<CaptureStep, readonly Capture[]>>;
}

/** Only the last attempt at each step counts. */
export function byJoint(captures: readonly Capture[]): readonly JointCaptures[] {
  const joints = new Map<string, { arm: string; joint: string; of: Record<CaptureStep, Capture[]> }>();
  for (const capture of captures) {
    const { arm, joint, step } = capture;
    const key = `${arm}\n${joint}`;
    let found = joints.get(key);
    if (found === undefined) {
      found = { arm, joint, of: nothingYet() };
      joints.set(key, found);
    }
    const same = found.of[step];
    const attempt = attemptOf(capture);
    const last = same[0] === undefined ? attempt : attemptOf(same[0]);
    if (attempt > last) same.length = 0;
    if (attempt >= last) same.push(capture);
  }
  return [...joints.values()];
}

/** A list for each step. */
export function nothingYet(): Record<CaptureStep, Capture[]> {
  return {
    'leader-still': [],
    'leader-sweep': [],
    'leader-point': [],
    'servo-point': [],
    'servo-step': [],
    match: [],
  };
}

/** Number of the attempt that a capture belongs to, from 1. */
export function attemptOf({ attempt }: Capture): number {
  return Number.isNaN(attempt) ? 1 : attempt;
}

/** A capture with nothing but its step, arm and joint. */
export function emptyCapture(step: CaptureStep, arm: string, joint: string): Capture {
  const none = Number.NaN;
  return {
    step,
    arm,
    joint,
    counts: none,
    pulseUs: none,
    knownDeg: none,
    tMs: none,
    noiseCounts: none,
    moved: none,
    channel: none,
    attempt: none,
  };
}
