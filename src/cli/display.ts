import type { LiveStatus } from '../bridge/live.ts';
import type { Sentence } from '../bridge/words.ts';
import type { State } from '../follower/states.ts';
import type { OperatorStanding } from './operator.ts';

/** How a run shows itself: a live view, plain lines, or JSON. */
export interface Display {
  /** A look at everything, ten times a second. */
  look(look: Look): void;
  /** A follower has changed its state; told at once. */
  changed(change: Change): void;
  say(sentence: Sentence, atUs: number): void;
  /** The last look. Afterwards the screen is the shell's again. */
  end(look: Look, why: Ending): Promise<void>;
}

export interface Look {
  /** Since the start, microseconds. */
  readonly atUs: number;
  readonly status: LiveStatus;
  readonly perSecond: readonly number[];
  readonly operator: Readonly<OperatorStanding>;
  /** What goes along with the run does just now; empty: nothing. */
  readonly along: string;
}

export interface Change {
  /** Since the start, microseconds. */
  readonly atUs: number;
  readonly follower: string;
  readonly from: State;
  readonly to: State;
  /** Why, and what to do; empty where the state says it all. */
  readonly reasons: readonly string[];
}

/** Why a run ends. */
export type Ending =
  /** The second Ctrl-C. */
  | 'interrupted'
  /** SIGTERM, SIGHUP, or nobody reads or sits there any more. */
  | 'terminated'
  /** The operator left. */
  | 'quit'
  /** Its time was over, or the operator asked for it, and every arm is parked. */
  | 'parked'
  /** Not every arm could be parked. */
  | 'unparked'
  /** Its time was over, and there was nothing to park. */
  | 'over'
  /** A fault of this program. */
  | 'broken';
