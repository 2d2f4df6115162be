import type { LiveStatus } from '../../bridge/live.ts';
import type { Sentence, WAKES_AT } from '../../bridge/words.ts';

/** Everything the live view shows, at one instant. */
export interface Scene {
  readonly rig: string;
  readonly dry: boolean;
  /** Since the start, microseconds. */
  readonly nowUs: number;
  readonly status: LiveStatus;
  /** What goes along with the run does just now; empty: nothing. */
  readonly along: string;
  /** Commands a second of each follower. */
  readonly perSecond: readonly number[];
  /** What each follower would wake at: its rest pose, or what it was last told. */
  readonly wakesAt: readonly WakesAt[];
  /** Which followers the keys are for, in rig order. */
  readonly selected: readonly boolean[];
  /** Oldest first. */
  readonly messages: readonly Message[];
  /** Nobody has let an arm move yet: what has to be known first is shown. */
  readonly cautions: boolean;
  /** A question to the operator, above everything else. */
  readonly prompt: string | null;
  readonly help: boolean;
}

export type WakesAt = keyof typeof WAKES_AT;

export interface Message extends Sentence {
  /** Since the start, microseconds. */
  readonly atUs: number;
  /** How often it was said in a row. */
  readonly times: number;
}

export interface Size {
  readonly columns: number;
  readonly rows: number;
}
