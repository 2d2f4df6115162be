/**
 * Everything that can happen to a drive, as one serial stream in order of time. What the drive does is a fold over it:
 * the same plan, start poses and events give the same commands. Sources may reuse event objects: one is valid until
 * its delivery returns.
 */
export type DriveEvent =
  | ReadingEvent
  | PoseEvent
  | TargetEvent
  | LeadEvent
  | TickEvent
  | KeyEvent
  | BoardEvent
  | JogEvent;

/** One timed set of raw counts from the leader. */
export interface ReadingEvent {
  readonly kind: 'reading';
  readonly tUs: number;
  /** Parallel to the leader board's inputs; NaN where this reading has no value. */
  readonly counts: Float64Array;
}

/** A virtual leader's pose, radians, in joint order: a take being played, a simulation. */
export interface PoseEvent {
  readonly kind: 'pose';
  readonly tUs: number;
  readonly poseRad: Float64Array;
}

/** Where one follower is to be, and how fast, at this instant: commands of a take being played again. */
export interface TargetEvent {
  readonly kind: 'target';
  readonly tUs: number;
  readonly follower: number;
  /** In joint order, radians and rad/s. */
  readonly anglesRad: Float64Array;
  readonly speedsRadS: Float64Array;
}

/** Who leads from now on; every arm then joins gently, because the new leader may be anywhere. */
export interface LeadEvent {
  readonly kind: 'lead';
  readonly tUs: number;
  /** 1 for each of the leader's joints that `pose` events lead, 0 for those that stay in the hand. */
  readonly posed: Uint8Array;
  /** Followers go where `target` events say, whatever the leader's pose. */
  readonly targets: boolean;
}

/** An instant at which something is due; made from `Drive.dueUs`, never from the moment a timer happened to fire. */
export interface TickEvent {
  readonly kind: 'tick';
  readonly tUs: number;
}

/** What an operator asks for. */
export type Key =
  | 'go'
  | 'join'
  | 'hold'
  | 'park'
  | 'limp'
  | 'stop'
  | 'rearm'
  /** Takes hold of, or lets go of, the leader for this follower. */
  | 'clutch'
  /** Sets the share of every speed limit: `value`, 0 to 1. */
  | 'pace'
  /** Names a moment in a recording; moves nothing. */
  | 'mark';

export interface KeyEvent {
  readonly kind: 'key';
  readonly tUs: number;
  readonly key: Key;
  /** Index of the follower it is for, or `ALL`. */
  readonly follower: number;
  readonly value: number;
}

/** Every follower. */
export const ALL = -1;
/** The leader's own board, in a `BoardEvent`. */
export const LEADER = -2;

/** What happened to a board: to the way out of all followers on it, or to the leader's way in. */
export interface BoardEvent {
  readonly kind: /** Open and greeted. */
    | 'ready'
    | 'down'
    /** The board has restarted; a `ready` will follow. */
    | 'reboot'
    /** The port is still busy with the last command. */
    | 'blocked'
    /** It can take one again. */
    | 'free';
  readonly tUs: number;
  /**
   * Index of any follower on the board, which stands for all of them: they have one port, and none may be told later
   * than another that it is busy. `LEADER` for the leader's part of its board.
   */
  readonly follower: number;
  /** For `ready`: the board is known not to have restarted since it was last ready. */
  readonly kept: boolean;
}

/** Moves one servo by pulse, to measure it. */
export interface JogEvent {
  readonly kind: 'jog';
  readonly tUs: number;
  readonly follower: number;
  readonly servo: number;
  /** Where to, in microseconds; NaN ends the jog and brings the servo back to its joint's angle. */
  readonly pulseUs: number;
}
