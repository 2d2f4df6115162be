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
}

/** Steps and what each row of them has to hold. */
export const CAPTURE_STEPS = {
  'leader-still': ['counts'],
  'leader-sweep': ['counts'],
  'leader-point': ['counts', 'known_deg'],
  'servo-point': ['pulse_us', 'known_deg'],
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
] as const;

/** The captures of one joint, step by step, in the order in which they were made. */
export interface JointCaptures {
  readonly arm: string;
  readonly joint: string;
  readonly of: Readonly<Record<CaptureStep, readonly Capture[]>>;
}

export function byJoint(captures: readonly Capture[]): readonly JointCaptures[] {
  const joints = new Map<string, { arm: string; joint: string; of: Record<CaptureStep, Capture[]> }>();
  for (const capture of captures) {
    const { arm, joint, step } = capture;
    const key = `${arm}\n${joint}`;
    let found = joints.get(key);
    if (found === undefined) {
      found = {
        arm,
        joint,
        of: { 'leader-still': [], 'leader-sweep': [], 'leader-point': [], 'servo-point': [], match: [] },
      };
      joints.set(key, found);
    }
    found.of[step].push(capture);
  }
  return [...joints.values()];
}
