import type { Live, LiveOptions } from '../bridge/live.ts';
import type { Sentence } from '../bridge/words.ts';
import type { Clock } from '../clock/clock.ts';

/** What goes along with a run: a recording, a take that plays. */
export interface Companion {
  /** Sees every event from the first on. */
  readonly onStart: NonNullable<LiveOptions['onStart']>;
  begin(company: Company): void;
  key(key: CompanionKey): void;
  /** What it is doing just now, in a few words, for the head of the view; empty: nothing. */
  standing(): string;
  /** The run is over; resolves with whether all went well. */
  end(): Promise<boolean>;
}

/** Keys of the live view that are its: name a moment, begin or end a recording, hand over between take and hand. */
export type CompanionKey = 'mark' | 'record' | 'hand_over';

export interface Company {
  readonly live: Live;
  readonly clock: Clock;
  say(sentence: Sentence): void;
  /** Says it, and again when the screen has been given back. */
  sayLast(sentence: Sentence): void;
  parkAndLeave(): void;
  leave(): void;
}
