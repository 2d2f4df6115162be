import fc from 'fast-check';
import type { Key } from '../../src/drive/events.ts';
import { type Random, random } from '../../src/sim/random.ts';
import { DEG, MS, PRESSED, RELEASED, S } from '../plans.ts';
import type { Staging } from './random-plans.ts';
import { Rehearsal } from './rehearsal.ts';

/** What a leader's joint does during a scene. */
const MANNERS = ['still', 'swing', 'step', 'tremble', 'rail', 'hole', 'nonsense'] as const;

/** One stretch of a rehearsal: something happens to it, and then readings come in some manner, or none. */
interface Scene {
  readonly forUs: number;
  readonly what: Happening;
  readonly manner: (typeof MANNERS)[number];
  /** 0: no readings at all. */
  readonly everyUs: number;
  readonly amplitudeDeg: number;
  readonly seed: number;
}

type Happening =
  | { readonly kind: 'nothing' | 'leader down' | 'two readings at once' }
  | { readonly kind: 'key'; readonly key: Key; readonly follower: number; readonly value: number }
  | { readonly kind: 'blocked' | 'free' | 'down' | 'kept' | 'ready' | 'reboot'; readonly follower: number }
  | { readonly kind: 'button'; readonly index: number; readonly pressed: boolean }
  | { readonly kind: 'jog'; readonly follower: number; readonly servo: number; readonly pulseUs: number }
  | { readonly kind: 'pose'; readonly angleDeg: number }
  | { readonly kind: 'lead'; readonly posed: readonly (0 | 1)[]; readonly targets: boolean };

const KEYS: Key[] = ['go', 'join', 'hold', 'park', 'limp', 'stop', 'rearm', 'clutch', 'pace', 'mark'];
const who = fc.integer({ min: -1, max: 2 });
const seeds = fc.integer({ min: 0, max: 2 ** 31 - 1 });

const key = (keys: readonly Key[]): fc.Arbitrary<Happening> =>
  fc.record({
    kind: fc.constant('key' as const),
    key: fc.constantFrom(...keys),
    follower: who,
    value: fc.constantFrom(1, 0.5, 0.1, 0, 7, -1, Number.NaN),
  });

/** A take that plays along: its poses or its commands, with a hole now and then. */
const leads: fc.Arbitrary<Happening> = fc.record({
  kind: fc.constant('lead' as const),
  posed: fc.constantFrom<(0 | 1)[]>([0, 0, 0], [0, 0, 0], [1, 1, 1], [1, 0, 0], [0, 1, 1]),
  targets: fc.boolean(),
});

const happening: fc.Arbitrary<Happening> = fc.oneof(
  { weight: 8, arbitrary: fc.constantFrom({ kind: 'nothing' as const }, { kind: 'two readings at once' as const }) },
  { weight: 4, arbitrary: key(['go', 'join']) },
  { weight: 4, arbitrary: key(KEYS) },
  {
    weight: 4,
    arbitrary: fc.record({
      kind: fc.constantFrom(
        'blocked' as const,
        'free' as const,
        'down' as const,
        'kept' as const,
        'ready' as const,
        'reboot' as const,
      ),
      follower: fc.nat(2),
    }),
  },
  { weight: 1, arbitrary: fc.constant({ kind: 'leader down' as const }) },
  {
    weight: 2,
    arbitrary: fc.record({ kind: fc.constant('button' as const), index: fc.nat(3), pressed: fc.boolean() }),
  },
  {
    weight: 1,
    arbitrary: fc.record({
      kind: fc.constant('jog' as const),
      follower: fc.nat(2),
      servo: fc.integer({ min: -1, max: 3 }),
      pulseUs: fc.constantFrom(600, 1500, 2400, Number.NaN),
    }),
  },
  { weight: 2, arbitrary: leads },
  {
    weight: 1,
    arbitrary: fc.record({
      kind: fc.constant('pose' as const),
      angleDeg: fc.constantFrom(0, 40, -80, Number.NaN, Infinity),
    }),
  },
);

const scene: fc.Arbitrary<Scene> = fc.record({
  forUs: fc.constantFrom(1, 3 * MS, 40 * MS, 150 * MS, 400 * MS, 400 * MS, 1.2 * S, 1.2 * S, 3 * S),
  what: happening,
  manner: fc.constantFrom('swing', 'swing', 'swing', 'step', 'step', ...MANNERS),
  everyUs: fc.constantFrom(10 * MS, 10 * MS, 10 * MS, 2 * MS, 33 * MS, 0),
  amplitudeDeg: fc.constantFrom(90, 30, 2),
  seed: seeds,
});

export const randomScenes: fc.Arbitrary<Scene[]> = fc.array(scene, { minLength: 1, maxLength: 12, size: 'max' });

/** Plays scenes on a staging whose arms have been let go and follow, as far as their plan lets them. */
export function play(staging: Staging, scenes: readonly Scene[]): Rehearsal {
  const on = new Rehearsal(staging.plan, staging);
  const { leader, followers } = staging.plan;
  for (let b = 0; b < leader.buttons.length; b++)
    if (leader.buttons[b]?.does === 'enable') on.input(leader.joints.length + b, PRESSED);
  on.readyUnlessAwake().key('go');
  read(on, { manner: 'still', everyUs: 10 * MS, amplitudeDeg: 0, forUs: S, seed: 0 });
  for (const each of scenes) {
    happen(on, each.what, followers.length);
    read(on, each);
  }
  return on.run(0.5 * S);
}

function happen(on: Rehearsal, what: Happening, followers: number): void {
  switch (what.kind) {
    case 'nothing':
      return;
    case 'two readings at once':
      on.reads().reads();
      return;
    case 'leader down':
      on.board('down', -2);
      return;
    case 'key':
      if (what.follower < followers) on.key(what.key, what.follower, what.value);
      return;
    case 'button': {
      const { joints, buttons } = on.drive.plan.leader;
      if (what.index < buttons.length) on.input(joints.length + what.index, what.pressed ? PRESSED : RELEASED);
      return;
    }
    case 'lead': {
      const posed = Uint8Array.from(on.drive.plan.leader.joints, (_, j) => what.posed[j] as number);
      on.deliver({ kind: 'lead', tUs: on.nowUs, posed, targets: what.targets });
      return;
    }
    case 'jog':
      if (what.follower < followers) on.jog(what.servo, what.pulseUs, what.follower);
      return;
    case 'pose': {
      const poseRad = new Float64Array(on.drive.plan.leader.joints.length).fill((what.angleDeg * Math.PI) / 180);
      on.deliver({ kind: 'pose', tUs: on.nowUs, poseRad });
      return;
    }
    default:
      if (what.follower < followers) boardHappens(on, what.kind, what.follower);
  }
}

/** Ports are only lost when they are there, and only come back when they are lost. */
function boardHappens(on: Rehearsal, kind: 'blocked' | 'free' | 'down' | 'kept' | 'ready' | 'reboot', f: number): void {
  const { present } = on.stage(f).is;
  if (kind === 'ready' || kind === 'kept') {
    if (!present) on.board('ready', f, kind === 'kept');
  } else if (present) on.board(kind, f);
}

function read(on: Rehearsal, { manner, everyUs, amplitudeDeg, forUs, seed }: Omit<Scene, 'what'>): void {
  if (everyUs === 0) {
    on.run(forUs);
    return;
  }
  const chance = random(seed, 0);
  const { joints, countsMin, countsMax } = on.drive.plan.leader;
  const goal = joints.map(() => chance.between(-amplitudeDeg, amplitudeDeg));
  const rate = joints.map(() => chance.between(0.5, 8));
  const endUs = on.nowUs + forUs;
  for (let tS = 0; on.nowUs < endUs; tS += everyUs / S) {
    for (let j = 0; j < joints.length; j++) {
      const angle = (deg: number): void => void on.joint(j, deg);
      if (manner === 'swing') angle((goal[j] as number) * Math.sin((rate[j] as number) * tS));
      else if (manner === 'step') angle(goal[j] as number);
      else if (manner === 'tremble') angle((goal[j] as number) + chance.between(-5, 5));
      else if (manner === 'rail' && j === 0) on.input(j, chance.uniform() < 0.5 ? countsMin : countsMax);
      else if (manner === 'hole' && j === 0) on.input(j, Number.NaN);
      else if (manner === 'nonsense')
        on.input(j, [Infinity, -Infinity, 1e9, -7, Number.NaN, 500][Math.floor(6 * chance.uniform())] as number);
    }
    on.reads();
    playAlong(on, chance, goal, (rate[0] as number) * tS);
    on.run(Math.min(Math.round(everyUs * chance.between(0.2, 1.8)), endUs - on.nowUs));
  }
}

/** What a take says beside the hand's readings: heard where it leads, and to be ignored where it does not. */
function playAlong(on: Rehearsal, chance: Random, goal: readonly number[], phase: number): void {
  const { joints } = on.drive.plan.leader;
  if (on.led.posed.includes(1)) {
    const poseRad = Float64Array.from(joints, (_, j) => {
      const hole = chance.uniform() < 0.02 ? Number.NaN : 0;
      return hole + (goal[j] as number) * DEG * Math.cos(phase);
    });
    on.deliver({ kind: 'pose', tUs: on.nowUs, poseRad });
  }
  if (!on.led.targets) return;
  on.drive.followers.forEach(({ spec }, follower) => {
    const swingRad = (goal[0] as number) * DEG;
    const anglesRad = Float64Array.from(spec.joints, () =>
      chance.uniform() < 0.02 ? Number.NaN : swingRad * Math.sin(phase),
    );
    const speedsRadS = Float64Array.from(spec.joints, () => swingRad * Math.cos(phase) * chance.between(0, 8));
    on.deliver({ kind: 'target', tUs: on.nowUs, follower, anglesRad, speedsRadS });
  });
}
