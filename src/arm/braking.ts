/**
 * How an arm comes to a stand from a position and a speed, every joint as hard as it may, cut into pieces. On a piece
 * every joint speed falls in a straight line, so that what happens between two looks can be bounded.
 */
export interface Braking {
  /** Joint angles and speeds at the present look, radians and rad/s. */
  readonly at: Float64Array;
  readonly speed: Float64Array;
  /** Instants of the looks, seconds from the start of the braking; the last one is the stand. */
  readonly timeS: Float64Array;
  /** How many pieces there are; looks are 0 (moving) to `pieces` (standing). */
  pieces: number;
  /** Cuts the way from angles `x` at speeds `v` to a stand. */
  plan(x: Float64Array, v: Float64Array): void;
  /** Fills `at` and `speed` for look k of the planned way. */
  look(k: number): void;
  /** out[j] = where the way ends. */
  stand(x: Float64Array, v: Float64Array, out: Float64Array): void;
}

/** All joints together turn no further than this in one piece, radians; bounds between looks shrink with its square. */
const TURN_RAD = 0.04;
/** A way longer than this many pieces gets longer pieces, and wider bounds. */
const PIECES = 12;
/** Instants closer than this are one, seconds. */
const SAME_S = 1e-9;

/** @param accelRadS2 acceleration limit of each joint; read when a way is planned */
export function braking(joints: number, accelRadS2: Float64Array): Braking {
  const at = new Float64Array(joints);
  const speed = new Float64Array(joints);
  const stops = new Float64Array(joints);
  const timeS = new Float64Array(PIECES + 2 * joints + 2);
  const from = new Float64Array(joints);
  const fromSpeed = new Float64Array(joints);
  const turned = new Float64Array(2);

  /** turned[i] = how far all joints together turn until timeS. */
  const turnUntil = (until: number, i: number): void => {
    let sum = 0;
    for (let j = 0; j < joints; j++) {
      const t = Math.min(until, stops[j] as number);
      sum += Math.abs(fromSpeed[j] as number) * t - 0.5 * (accelRadS2[j] as number) * t * t;
    }
    turned[i] = sum;
  };

  /** The next stop after `after`; the same where there is none. */
  const nextStop = (after: number): number => {
    let next = Number.POSITIVE_INFINITY;
    for (let j = 0; j < joints; j++) {
      const stop = stops[j] as number;
      if (stop > after + SAME_S && stop < next) next = stop;
    }
    return next === Number.POSITIVE_INFINITY ? after : next;
  };

  const self: Braking = {
    at,
    speed,
    timeS,
    pieces: 0,
    plan(x, v) {
      let longest = 0;
      for (let j = 0; j < joints; j++) {
        from[j] = x[j] as number;
        fromSpeed[j] = v[j] as number;
        stops[j] = Math.abs(v[j] as number) / (accelRadS2[j] as number);
        longest = Math.max(longest, stops[j] as number);
      }
      turnUntil(longest, 0);
      const turn = Math.max(TURN_RAD, (turned[0] as number) / PIECES);
      let pieces = 0;
      let start = 0;
      turned[0] = 0;
      for (let end = nextStop(start); end > start; end = nextStop(start)) {
        turnUntil(end, 1);
        const cuts = Math.max(1, Math.ceil(((turned[1] as number) - (turned[0] as number)) / turn));
        for (let cut = 1; cut <= cuts; cut++) timeS[++pieces] = start + ((end - start) * cut) / cuts;
        turned[0] = turned[1] as number;
        start = end;
      }
      self.pieces = pieces;
    },
    look(k) {
      const time = timeS[k] as number;
      for (let j = 0; j < joints; j++) {
        const v0 = fromSpeed[j] as number;
        const A = v0 < 0 ? -(accelRadS2[j] as number) : (accelRadS2[j] as number);
        const t = Math.min(time, stops[j] as number);
        at[j] = (from[j] as number) + v0 * t - 0.5 * A * t * t;
        speed[j] = time < (stops[j] as number) ? v0 - A * t : 0;
      }
    },
    stand(x, v, out) {
      for (let j = 0; j < joints; j++) {
        const v0 = v[j] as number;
        out[j] = (x[j] as number) + (0.5 * v0 * Math.abs(v0)) / (accelRadS2[j] as number);
      }
    },
  };
  return self;
}
