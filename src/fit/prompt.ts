import type { Capture } from './captures.ts';

/** What a session asks of its operator. The terminal and the page show the same; neither knows more. */
export interface Prompt {
  /** What is new to be read; a session hands it out once, by `said`. */
  readonly lines: readonly string[];
  /** What an answer is wanted to; null: none, something is under way. */
  readonly ask: string | null;
  /** Live: how far a joint has been swept. Filled on by the session, so look at it whenever it is drawn. */
  readonly tape: Tape | null;
}

export interface Tape {
  readonly lowest: number;
  readonly highest: number;
  /** One a cell from lowest to highest: 1 where a reading fell. */
  readonly visited: Uint8Array;
  now: number;
}

/** What happens to a session. Counts are valid until `take` returns. */
export type SessionEvent =
  /** The operator has entered a line, perhaps an empty one. */
  | { readonly kind: 'line'; readonly text: string }
  | { readonly kind: 'reading'; readonly tUs: number; readonly counts: Float64Array }
  /** A servo has come to where it was sent, or, with `home`, back to where its joint says. */
  | { readonly kind: 'jogged'; readonly follower: number; readonly home: boolean }
  /** A follower has its pulses and stands still: its servos can be jogged. */
  | { readonly kind: 'awake'; readonly follower: number }
  /** No reading has come for so long that none is on its way; only told while `listens`. */
  | { readonly kind: 'silent'; readonly why: string }
  /** Its port went down, its board restarted, or it was stopped: no jog until it is awake again. */
  | { readonly kind: 'asleep'; readonly follower: number; readonly why: string };

/** What a session wants done. */
export type SessionEffect =
  /** Write these to the disk before anything else happens. */
  | { readonly kind: 'keep'; readonly captures: readonly Capture[] }
  /** Let a follower have its pulses: each servo at the middle of its points. */
  | { readonly kind: 'wake'; readonly follower: number }
  | { readonly kind: 'jog'; readonly follower: number; readonly servo: number; readonly pulseUs: number }
  /** It is over: fit what was captured, or leave it for another time. */
  | { readonly kind: 'end'; readonly fit: boolean /** With the suggested smoothing. */; readonly smooth: boolean };
