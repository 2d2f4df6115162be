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
  /** The stop before the present one, and the present one. */
  const span = new Float64Array(2);

  /** turned[i] = how far all joints together turn until span[1]. */
  const turnUntil = (i: number): void => {
    const until = span[1] as number;
    let sum = 0;
    for (let j = 0; j < joints; j++) {
      const t = Math.min(until, stops[j] as number);
      sum += Math.abs(fromSpeed[j] as number) * t - 0.5 * (accelRadS2[j] as number) * t * t;
    }
    turned[i] = sum;
  };

  /** span[1] = the next stop after span[0]; false where there is none. */
  const findStop = (): boolean => {
    const after = (span[0] as number) + SAME_S;
    span[1] = Number.POSITIVE_INFINITY;
    for (let j = 0; j < joints; j++) {
      if ((stops[j] as number) > after && (stops[j] as number) < (span[1] as number)) span[1] = stops[j] as number;
    }
    return span[1] !== Number.POSITIVE_INFINITY;
  };

  const self: Braking = {
    at,
    speed,
    timeS,
    pieces: 0,
    plan(x, v) {
      span.fill(0);
      for (let j = 0; j < joints; j++) {
        from[j] = x[j] as number;
        fromSpeed[j] = v[j] as number;
        stops[j] = Math.abs(v[j] as number) / (accelRadS2[j] as number);
        span[1] = Math.max(span[1] as number, stops[j] as number);
      }
      turnUntil(0);
      const turn = Math.max(TURN_RAD, (turned[0] as number) / PIECES);
      let pieces = 0;
      turned[0] = 0;
      while (findStop()) {
        turnUntil(1);
        const cuts = Math.max(1, Math.ceil(((turned[1] as number) - (turned[0] as number)) / turn));
        const start = span[0] as number;
        const end = span[1] as number;
        for (let cut = 1; cut <= cuts; cut++) timeS[++pieces] = start + ((end - start) * cut) / cuts;
        turned[0] = turned[1] as number;
        span[0] = end;
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
