import { US_PER_S } from '../clock/clock.ts';
import type { State } from '../follower/states.ts';

/** How one follower stands: a plain record that its authority, its steering and its pacing share. */
export interface Standing {
  state: State;
  /** Bits of `BLOCKS`. */
  blocks: number;
  /** Its port is open and its board has answered. */
  present: boolean;
  /** Its servos have pulses, as far as we know. */
  pulsed: boolean;
  /** Something has changed that the arm has not been told. */
  owed: boolean;
  /** Its last command did not leave it at a stand. */
  moving: boolean;
  /** In `waking`: the operator has let it start. */
  going: boolean;
  /** The clutch is out: the leader moves without this arm. */
  clutched: boolean;
  /** When its port went down. */
  downUs: number;
  /** When the next servo gets its first pulse. */
  nextPulseUs: number;
  /** Instant of the last command, integer microseconds; -Infinity before the first. */
  lastUs: number;
  /** In `joining` with `meet: wait`: the leader has come by. */
  meeting: boolean;
  /** After parking, end the pulses. */
  limpAfterPark: boolean;
  /** Contact was lost before parking was asked for: the operator knows. */
  parkStale: boolean;
  clutchKey: boolean;
}

// Doubles start as doubles, so that the engine stores them in place: a store into an integer slot would allocate.
export function standing(): Standing {
  return {
    state: 'absent',
    blocks: 0,
    present: false,
    pulsed: false,
    owed: false,
    moving: false,
    going: false,
    clutched: false,
    downUs: Number.NEGATIVE_INFINITY,
    nextPulseUs: Number.NEGATIVE_INFINITY,
    lastUs: Number.NEGATIVE_INFINITY,
    meeting: false,
    limpAfterPark: false,
    parkStale: false,
    clutchKey: false,
  };
}

/** A port back within this time, whose board did not restart, goes on by itself. */
export const BACK_US = US_PER_S;
