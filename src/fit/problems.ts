import type { NoMap } from './map-fit.ts';

/** Why a joint could not be fitted, and what would help. The others are fitted all the same. */
export interface FitProblem {
  readonly code: FitCode;
  readonly arm: string;
  readonly joint: string;
  readonly wrong: string;
  readonly right: string;
}

/** Every code with its remedy. */
export const FIT_CODES = {
  FIT_UNKNOWN_ARM: 'name an arm of the rig',
  FIT_UNKNOWN_JOINT: 'name a joint of that arm',
  FIT_FEW_POINTS: 'measure two points at least, better seven, spread over the whole travel',
  FIT_COINCIDENT: 'measure points further apart: they all read the same',
  FIT_FLAT: 'check that the pot turns with the joint and hangs on this channel',
  FIT_TURNS_BACK: 'measure those points again; if they were right, the pot wraps or slips inside the travel',
  FIT_WRONG_POINTS: 'measure both again; leave out what was read where the wiper is lost',
  FIT_WRAPS: 'turn the pot in its mount so that its dead end lies outside the travel, then sweep again',
  FIT_NEVER_STILL: 'support the joint, or mend its wiring, then measure again',
  FIT_NO_SERVO: 'give the joint a servo of its own, with a first guess at its points',
  FIT_WEIGHTED: 'match joints that copy one leader joint; set gain and offset of this one by hand',
  FIT_STRETCHED: 'its gain and offset come from stretch: true; take that out to match it',
  FIT_NOT_HERE: 'give the follower joints of its own in place of like:, to fit it apart',
} as const;

export type FitCode = keyof typeof FIT_CODES;

export function problem(code: FitCode, arm: string, joint: string, wrong: string): FitProblem {
  return { code, arm, joint, wrong, right: FIT_CODES[code] };
}

/** @param unit of the measured side, for the place where points turn back */
export function noMapProblem(no: NoMap, arm: string, joint: string, unit: string): FitProblem {
  switch (no.why) {
    case 'few':
      return problem('FIT_FEW_POINTS', arm, joint, `${no.n === 1 ? 'one point makes' : 'no points make'} no map`);
    case 'coincident':
      return problem('FIT_COINCIDENT', arm, joint, `all points stand at the same ${unit}`);
    case 'flat':
      return problem('FIT_FLAT', arm, joint, 'all points have the same angle, or rise as much as they fall');
    case 'wrong points': {
      const [a, b] = no.at;
      const both = `the points at ${Math.round(a)} and at ${Math.round(b)} ${unit} both stand out`;
      return problem('FIT_WRONG_POINTS', arm, joint, both);
    }
    case 'turns back': {
      const [from, to] = no.at;
      return problem('FIT_TURNS_BACK', arm, joint, `the points turn back near ${Math.round((from + to) / 2)} ${unit}`);
    }
  }
}

/** The problem as one line for people. */
export function problemLine({ code, arm, joint, wrong, right }: FitProblem): string {
  return `${arm}${joint === '' ? '' : ` ${joint}`}: ${wrong}; ${right} (${code})`;
}
