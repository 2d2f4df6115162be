import type { Live } from '../bridge/live.ts';
import { US_PER_S } from '../clock/clock.ts';
import type { Ending } from './display.ts';

/** Why a run ends, once. */
export interface End {
  /** The first reason counts. */
  readonly why: Promise<Ending>;
  /** Resolves when a second reason comes: whoever waits for arms to stand waits no longer. */
  readonly hurried: Promise<void>;
  because(why: Ending): void;
}

export function end(): End {
  let first: (why: Ending) => void = () => {};
  let second: () => void = () => {};
  let asked = false;
  return {
    why: new Promise<Ending>((resolve) => {
      first = resolve;
    }),
    hurried: new Promise<void>((resolve) => {
      second = resolve;
    }),
    because(why) {
      if (asked) second();
      else first(why);
      asked = true;
    },
  };
}

/** What a brake inside the limits may take, before the program leaves all the same. */
const STILL_US = US_PER_S;

/** Brakes every follower; true when they stand. Arms that are parked, or only simulated, are left as they are. */
export async function broughtToStand(live: Live, why: Ending, hurried: Promise<void>): Promise<boolean> {
  if (why === 'over') return true;
  if (why !== 'parked') live.key('hold');
  return Promise.race([live.still(STILL_US), hurried.then(() => false)]);
}

/** 0 done, 1 the run failed, 130 interrupted. Being ended from outside is no failure, as long as the arms stand. */
export function exitStatus(why: Ending, still: boolean): number {
  if (why === 'interrupted') return 130;
  return why === 'unparked' || why === 'broken' || !still ? 1 : 0;
}
