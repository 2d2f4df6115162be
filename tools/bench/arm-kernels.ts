import { certificate } from '../../src/arm/certificate.ts';
import { chain } from '../../src/arm/chain.ts';
import { dynamics } from '../../src/arm/dynamics.ts';
import { inverse } from '../../src/arm/inverse.ts';
import { loads } from '../../src/arm/load.ts';
import { hand, JOINTS, RATE_HZ, SIX, target, tipFollowers } from './arm-scene.ts';

/** A piece of work of the arm's kernels, done once for every command. */
export interface ArmKernel {
  readonly name: string;
  /** The most it may take at the median and at the 99th percentile, microseconds; null: not asked for. */
  readonly mostUs: number | null;
  readonly mostP99Us: number | null;
  /** Does the work of command k; the same k gives the same work. */
  run(k: number): void;
}

const FOLLOWERS = 64;
/** Half of one core for 64 arms at 200 commands a second. */
const HALF_CORE_US = 0.5e6 / (FOLLOWERS * RATE_HZ);

/** The first is what all others are compared with. */
export function armKernels(): readonly ArmKernel[] {
  return [forward(), warmInverse(), loadAndDynamics(), certified(false), certified(true), command()];
}

function forward(): ArmKernel {
  const poser = chain(SIX);
  const poses = hand();
  const q = new Float64Array(JOINTS);
  return {
    name: 'forward pose of six joints',
    mostUs: null,
    mostP99Us: null,
    run(k) {
      poses.at(k, false, q);
      poser.pose(q);
    },
  };
}

function warmInverse(): ArmKernel {
  const ends = { minRad: new Float64Array(JOINTS).fill(-2.5), maxRad: new Float64Array(JOINTS).fill(2.5) };
  const solver = inverse(SIX, { ...ends, moves: [0, 1, 2, 3, 4, 5] });
  const q = new Float64Array(JOINTS).fill(0.4);
  const prefer = new Float64Array(JOINTS);
  const goal = new Float64Array(3);
  const poses = hand();
  const places = target();
  return {
    name: 'inverse, warm start',
    mostUs: 25,
    mostP99Us: 100,
    run(k) {
      poses.at(k, false, prefer);
      places.at(k, false, goal);
      solver.solve(goal, prefer, q);
    },
  };
}

function loadAndDynamics(): ArmKernel {
  const { torqueNm: held } = loads(SIX, JOINTS);
  const { torqueNm: moved } = dynamics(SIX);
  const poses = hand();
  const q = new Float64Array(JOINTS);
  const speeds = new Float64Array(JOINTS).fill(0.5);
  const accels = new Float64Array(JOINTS).fill(2);
  const out = new Float64Array(JOINTS);
  return {
    name: 'load and dynamics',
    mostUs: 5,
    mostP99Us: null,
    run(k) {
      poses.at(k, false, q);
      held(q, out);
      moved(q, speeds, accels, out);
    },
  };
}

/** Judges a step far from every limit, or one that comes close to all of them. */
function certified(close: boolean): ArmKernel {
  const accel = new Float64Array(JOINTS).fill(6);
  const keepOut = [{ kind: 'below', zM: close ? 0.3 : -2 }] as const;
  const judge = certificate(SIX, JOINTS, accel, { keepOut }, loads(SIX, JOINTS)).judge;
  const poses = hand();
  const x0 = new Float64Array(JOINTS);
  const x = new Float64Array(JOINTS);
  const v = new Float64Array(JOINTS);
  const dt = Float64Array.of(1 / RATE_HZ);
  const cap = Float64Array.of(close ? 0.3 : 5);
  return {
    name: close ? 'certified step, close to its limits' : 'certified step, far from its limits',
    mostUs: null,
    mostP99Us: null,
    run(k) {
      poses.at(k, false, x0);
      poses.at(k, true, x);
      for (let j = 0; j < JOINTS; j++) v[j] = (2 * ((x[j] as number) - (x0[j] as number))) / (dt[0] as number);
      judge(x0, x, v, dt, cap, true);
    },
  };
}

/** One command of one of 64 followers in tip mode, capped, kept out and with loads limited, from pose to pulses. */
function command(): ArmKernel {
  const arms = tipFollowers(FOLLOWERS);
  const poses = hand();
  const pose = new Float64Array(JOINTS);
  const dt = Float64Array.of(1 / RATE_HZ);
  const open = Float64Array.of(1);
  for (const one of arms) one.limitSpeed(open, false);
  return {
    name: 'command of a capped arm in tip mode',
    mostUs: HALF_CORE_US,
    mostP99Us: null,
    run(k) {
      poses.at(Math.floor(k / FOLLOWERS), false, pose);
      const one = arms[k % FOLLOWERS] as (typeof arms)[number];
      one.want(pose, false);
      one.step(dt);
    },
  };
}
