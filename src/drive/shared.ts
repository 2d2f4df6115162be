/** What the stages of one drive have in common. Numbers live in arrays so that none crosses a call and is boxed. */
export interface Shared {
  /** The instant of the event being handled, in integer microseconds. */
  readonly nowUs: Float64Array;
  /** Share of every speed limit, 0 to 1, live. */
  readonly pace: Float64Array;
  /** When the next servo may get its first pulse: arms wake one servo after another, for the supply's sake. */
  readonly inrushFreeUs: Float64Array;
  /** 1 for each follower in state `following`, in rig order: only those count in unison. */
  readonly following: Uint8Array;
  /** Share of its speed limits that each follower may use while it follows, pace apart. */
  readonly opened: Float64Array;
  /**
   * Of the step being made, one for all, because they are made one after another: its time in seconds, and its share of
   * the speed limits, pace included.
   */
  readonly dtS: Float64Array;
  readonly share: Float64Array;
  /** The board each follower hangs on, in rig order. */
  readonly boardOf: readonly number[];
  /** 1 for each board that has been given a command in the event being handled. */
  readonly taken: Uint8Array;
  /** 1 for each board whose port is still busy with the last command. */
  readonly busy: Uint8Array;
  /** Since when, integer microseconds. */
  readonly busySinceUs: Float64Array;
}

export function shared(startUs: number, boardOf: readonly number[], pace: number): Shared {
  const boards = 1 + Math.max(-1, ...boardOf);
  return {
    nowUs: new Float64Array([startUs]),
    pace: new Float64Array([pace]),
    inrushFreeUs: new Float64Array([Number.NEGATIVE_INFINITY]),
    following: new Uint8Array(boardOf.length),
    opened: new Float64Array(boardOf.length),
    dtS: new Float64Array(1),
    share: new Float64Array(1),
    boardOf,
    taken: new Uint8Array(boards),
    busy: new Uint8Array(boards),
    busySinceUs: new Float64Array(boards),
  };
}
