import { bodies, GRAVITY_MS2, type LinkInertia } from './bodies.ts';
import { chain as makeChain, timesInto } from './chain.ts';
import { passive } from './passive.ts';
import type { ArmSpec } from './spec.ts';

/**
 * Moving load of an arm by the recursive Newton-Euler sums (J. Y. S. Luh, M. W. Walker, R. P. C. Paul, J. Dyn. Sys. Meas.
 * Control 102 (1980) 69-76, from memory; K. M. Lynch, F. C. Park, Modern Robotics, 2017, ch. 8), in the level frame.
 * A link's own mass counts as a slender rod of the link's length unless it is told otherwise; counterweights and the
 * payload count as points. What turns inside a motor is not known and does not count.
 */
export interface Dynamics {
  /**
   * out[j] = torque that joint j's motor must supply, newton metres; 0 for a joint without a link. All arrays have one
   * value a joint of the profile: angles, rad/s, rad/s^2. At rest it is the static load.
   */
  torqueNm(anglesRad: Float64Array, speedsRadS: Float64Array, accelsRadS2: Float64Array, out: Float64Array): void;
  /** out[j] = torque for these accelerations alone: no weight, no speed, no spring, no drag. Row by row, the mass matrix. */
  inertialNm(anglesRad: Float64Array, accelsRadS2: Float64Array, out: Float64Array): void;
}

export interface DynamicsOptions {
  /** How each link's own mass lies about its centre; absent: as a rod. */
  readonly inertia?: readonly LinkInertia[];
  readonly gravityMS2?: number;
}

export function dynamics(spec: ArmSpec, { inertia, gravityMS2 = GRAVITY_MS2 }: DynamicsOptions = {}): Dynamics {
  const chain = makeChain(spec);
  const { links, joint, at, turn, axis } = chain;
  const { massKg, momentKgM, inertiaKgM2 } = bodies(spec, inertia);
  const pulls = passive(spec);
  const dragNm = Float64Array.from(spec.links, (link) => link.dragNm);
  const still = new Float64Array(Math.max(...joint) + 1);
  const torque = new Float64Array(links);
  /** Angular speed and acceleration of the present link, acceleration of its start. */
  const w = new Float64Array(3);
  const dw = new Float64Array(3);
  const a = new Float64Array(3);
  const before = new Float64Array(3);
  /** The link's first moment of mass in the level frame. */
  const s = new Float64Array(3);
  const local = new Float64Array(3);
  const spun = new Float64Array(3);
  const other = new Float64Array(3);
  /** Force on each link, and moment on it about its start, that move it as it moves; 3 values a link. */
  const force = new Float64Array(3 * links);
  const moment = new Float64Array(3 * links);

  /** out = I v, with the inertia of link i about its start, v and out in the level frame. */
  const inertiaTimes = (i: number, v: Float64Array, out: Float64Array): void => {
    for (let c = 0; c < 3; c++) {
      local[c] =
        (turn[9 * i + c] as number) * (v[0] as number) +
        (turn[9 * i + 3 + c] as number) * (v[1] as number) +
        (turn[9 * i + 6 + c] as number) * (v[2] as number);
    }
    timesInto(inertiaKgM2, 9 * i, local, 0, out, 0);
    timesInto(turn, 9 * i, out, 0, out, 0);
  };

  /** Takes on the motion of link i's joint. */
  const turnOn = (i: number, speeds: Float64Array, accels: Float64Array): void => {
    const speed = speeds[joint[i] as number] as number;
    const accel = accels[joint[i] as number] as number;
    before.set(w);
    for (let k = 0; k < 3; k++) other[k] = (axis[3 * i + k] as number) * speed;
    for (let k = 0; k < 3; k++) {
      w[k] = (w[k] as number) + (other[k] as number);
      dw[k] = (dw[k] as number) + (axis[3 * i + k] as number) * accel;
    }
    addCross(dw, before, 0, other, 0);
  };

  /** Force on link i, and moment about its start: F = m a + dw x s + w x (w x s), N = s x a + I dw + w x I w. */
  const load = (i: number): void => {
    timesInto(turn, 9 * i, momentKgM, 3 * i, s, 0);
    spun.fill(0);
    addCross(spun, w, 0, s, 0);
    other.fill(0);
    addCross(other, dw, 0, s, 0);
    addCross(other, w, 0, spun, 0);
    for (let k = 0; k < 3; k++) force[3 * i + k] = (massKg[i] as number) * (a[k] as number) + (other[k] as number);
    inertiaTimes(i, dw, other);
    inertiaTimes(i, w, spun);
    addCross(other, s, 0, a, 0);
    addCross(other, w, 0, spun, 0);
    for (let k = 0; k < 3; k++) moment[3 * i + k] = other[k] as number;
  };

  /** Goes on to the link's end: a += dw x r + w x (w x r). */
  const goOn = (i: number): void => {
    for (let k = 0; k < 3; k++) local[k] = (at[3 * i + 3 + k] as number) - (at[3 * i + k] as number);
    spun.fill(0);
    addCross(spun, w, 0, local, 0);
    addCross(a, dw, 0, local, 0);
    addCross(a, w, 0, spun, 0);
  };

  const run = (q: Float64Array, speeds: Float64Array, accels: Float64Array, weighed: boolean): void => {
    chain.pose(q);
    w.fill(0);
    dw.fill(0);
    a.fill(0);
    // A base that rises with g weighs as much as one that stands.
    a[2] = weighed ? gravityMS2 : 0;
    for (let i = 0; i < links; i++) {
      turnOn(i, speeds, accels);
      load(i);
      goOn(i);
    }
    for (let i = links - 1; i >= 0; i--) {
      let about = 0;
      for (let k = 3 * i; k < 3 * i + 3; k++) about += (axis[k] as number) * (moment[k] as number);
      torque[i] = about;
      if (i === 0) continue;
      for (let k = 0; k < 3; k++) {
        local[k] = (at[3 * i + k] as number) - (at[3 * i - 3 + k] as number);
        other[k] = (moment[3 * i - 3 + k] as number) + (moment[3 * i + k] as number);
      }
      addCross(other, local, 0, force, 3 * i);
      for (let k = 0; k < 3; k++) {
        moment[3 * i - 3 + k] = other[k] as number;
        force[3 * i - 3 + k] = (force[3 * i - 3 + k] as number) + (force[3 * i + k] as number);
      }
    }
  };

  const hand = (out: Float64Array): void => {
    out.fill(0);
    for (let i = 0; i < links; i++) out[joint[i] as number] = torque[i] as number;
  };

  return {
    torqueNm(anglesRad, speedsRadS, accelsRadS2, out) {
      run(anglesRad, speedsRadS, accelsRadS2, true);
      pulls.addHeld(anglesRad, torque);
      for (let i = 0; i < links; i++) {
        const speed = speedsRadS[joint[i] as number] as number;
        torque[i] = (torque[i] as number) + Math.sign(speed) * (dragNm[i] as number);
      }
      hand(out);
    },
    inertialNm(anglesRad, accelsRadS2, out) {
      run(anglesRad, still, accelsRadS2, false);
      hand(out);
    },
  };
}

/** out += a x b, of the three values at each offset. */
function addCross(out: Float64Array, a: Float64Array, ao: number, b: Float64Array, bo: number): void {
  const ax = a[ao] as number;
  const ay = a[ao + 1] as number;
  const az = a[ao + 2] as number;
  const bx = b[bo] as number;
  const by = b[bo + 1] as number;
  const bz = b[bo + 2] as number;
  out[0] = (out[0] as number) + ay * bz - az * by;
  out[1] = (out[1] as number) + az * bx - ax * bz;
  out[2] = (out[2] as number) + ax * by - ay * bx;
}
