import { PassThrough } from 'node:stream';
import { setImmediate as turn } from 'node:timers/promises';
import type { Clock } from '../../src/clock/clock.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import type { FitEnding, FitTable } from '../../src/cli/fit-session.ts';
import { noiseAt, random } from '../../src/sim/random.ts';

/**
 * A person at a bench who measures a rig: a hand on pots whose truth is planted, eyes on horns whose truth is planted, and
 * fingers that answer what the session asks. Everything happens on a virtual clock.
 */

/** A pot as it is: what the converter reads, not rounded, at an angle of its joint. */
export interface Pot {
  counts(deg: number): number;
  /** Root mean square, in counts. */
  readonly noise: number;
  /** Degrees between which the wiper has lost its track: it then reads 0. */
  readonly dead: readonly [number, number] | null;
}

/** A joint of the leader in a hand: where it is, and was. */
export interface HeldJoint {
  readonly name: string;
  readonly pot: Pot;
  angleAt(tUs: number): number;
  /** Moves on from where it last was sent: there in `seconds`. */
  go(deg: number, seconds: number): void;
  /** When all that it was told is over. */
  readonly doneUs: number;
}

export function heldJoint(clock: Pick<Clock, 'nowUs'>, name: string, pot: Pot): HeldJoint {
  const legs: { fromUs: number; toUs: number; from: number; to: number }[] = [];
  return {
    name,
    pot,
    angleAt(tUs) {
      const leg = legs.findLast(({ fromUs }) => fromUs <= tUs);
      if (leg === undefined) return 0;
      const share = leg.toUs === leg.fromUs ? 1 : Math.min(1, (tUs - leg.fromUs) / (leg.toUs - leg.fromUs));
      return leg.from + share * (leg.to - leg.from);
    },
    go(deg, seconds) {
      const last = legs.at(-1);
      const fromUs = Math.max(clock.nowUs(), last?.toUs ?? 0);
      legs.push({ fromUs, toUs: fromUs + seconds * 1e6, from: last?.to ?? 0, to: deg });
    },
    get doneUs() {
      return Math.max(clock.nowUs(), legs.at(-1)?.toUs ?? 0);
    },
  };
}

/** What the converter reads of a joint, not rounded, noise and dead spot included. */
export function countsOf({ pot, angleAt }: HeldJoint, tUs: number, channel: number): number {
  const deg = angleAt(tUs);
  if (pot.dead !== null && deg > pot.dead[0] && deg < pot.dead[1]) return 0;
  return pot.counts(deg) + pot.noise * noiseAt(11, tUs, channel);
}

/** A servo's horn as it is. */
export interface Horn {
  readonly joint: string;
  /** Degrees of the joint at a pulse, in the middle of its play. */
  deg(pulseUs: number): number;
  /** The pulse it has now. */
  pulseUs(): number;
  /** Where it stands now, deadband and play included, degrees. */
  standsDeg(): number;
}

/** A servo that answers no change of up to `deadbandUs`, on whose gears a horn hangs with play; it is there at once. */
export interface PlantedServo extends Horn {
  feed(pulseUs: number): void;
}

export function plantedServo(
  joint: string,
  deg: (pulseUs: number) => number,
  { deadbandUs, playUs }: { readonly deadbandUs: number; readonly playUs: number },
): PlantedServo {
  let pulse = Number.NaN;
  let shaft = Number.NaN;
  let horn = Number.NaN;
  return {
    joint,
    deg,
    pulseUs: () => pulse,
    standsDeg: () => deg(horn),
    feed(pulseUs) {
      pulse = pulseUs;
      if (Number.isNaN(shaft)) {
        shaft = pulseUs;
        horn = pulseUs;
      }
      if (Math.abs(pulseUs - shaft) > deadbandUs) shaft = pulseUs;
      horn = Math.min(shaft + playUs / 2, Math.max(shaft - playUs / 2, horn));
    },
  };
}

export interface Person {
  readonly leader: readonly HeldJoint[];
  readonly horns: readonly Horn[];
  /** What a follower's joint should be for an angle of the leader's: leader degrees that look like follower degrees. */
  alike(joint: string, followerDeg: number): { readonly source: HeldJoint; readonly deg: number };
  /** Angles at which points are taken, for each joint of the leader. */
  readonly anglesDeg: readonly number[];
  /** How far off the person reads or sets an angle, at most, degrees. */
  readonly errorDeg: number;
  readonly seed: number;
}

/** What to type, and how long to wait before. */
interface Reply {
  readonly text: string;
  readonly untilUs: number;
}

/** Sweeps: from stop to stop twice, with dwells at the stops and at a mark on the way. */
function sweep(
  joint: HeldJoint,
  stops: readonly [number, number],
  mark: number,
  seconds: number,
  wobble: () => number,
): void {
  const [low, high] = stops;
  const legs = [low, mark, high, mark, low, mark, high, mark, low];
  let from = joint.angleAt(joint.doneUs);
  for (const to of legs) {
    const end = Math.min(high, Math.max(low, to + (to === mark ? wobble() : 0)));
    joint.go(end, Math.max(0.5, (seconds * Math.abs(end - from)) / (high - low)));
    joint.go(end, 1);
    from = end;
  }
}

/** The end of a stick on a horn is seen to move from here on. */
const SEEN_DEG = 0.1;

export interface PersonOptions {
  readonly stopsDeg: readonly [number, number];
  readonly sweepS: number;
}

/** Answers every question of a session from first to last. */
export function replies(person: Person, { stopsDeg, sweepS }: PersonOptions): (ask: string, before: string) => Reply {
  const chance = random(person.seed, 7);
  const error = (): number => (2 * chance.uniform() - 1) * person.errorDeg;
  const left = new Map(person.leader.map(({ name }) => [name, [...person.anglesDeg]]));
  const named = (text: string): HeldJoint => {
    const found = person.leader.find(({ name }) => new RegExp(`\\b${name}\\b`).test(text));
    if (found === undefined) throw new Error(`nobody knows what to move: ${text}`);
    return found;
  };
  const hornOf = (joint: string): Horn => {
    const found = person.horns.find((horn) => horn.joint === joint);
    if (found === undefined) throw new Error(`there is no horn of ${joint}`);
    return found;
  };
  const at = (text: string, untilUs = 0): Reply => ({ text, untilUs });
  let moving = '';
  let stood: { joint: string; deg: number } | null = null;
  return (ask, before) => {
    if (ask.includes('(or a number')) return at('');
    if (ask.startsWith('Type yes')) return at('yes');
    if (ask.includes('past the middle')) {
      moving = /(\w+) is at its middle pulse/.exec(before)?.[1] ?? '';
      const horn = hornOf(moving);
      return at(horn.standsDeg().toFixed(1));
    }
    if (ask.startsWith('Teeth')) return at('');
    if (ask.startsWith('Enter when you have')) {
      const joint = named(before.split('\n').findLast((line) => line.startsWith('Move ')) ?? '');
      joint.go(60, 1);
      joint.go(-60, 2);
      joint.go(0, 1);
      return at('', joint.doneUs);
    }
    if (ask.startsWith('Enter when it lies')) return at('');
    if (ask.startsWith('Enter when you are through')) {
      const joint = named(before.split('\n').findLast((line) => line.startsWith('Take ')) ?? '');
      sweep(joint, stopsDeg, 10, sweepS, () => 0.1 * (2 * chance.uniform() - 1));
      return at('', joint.doneUs + 2e5);
    }
    if (ask.startsWith('Angle of ')) {
      const joint = named(ask);
      const next = left.get(joint.name)?.shift();
      if (next === undefined) return at('');
      joint.go(next + error(), 0.2);
      return at(String(next), joint.doneUs + 1e5);
    }
    if (ask.startsWith('Enter: ')) return at('');
    if (ask.startsWith('Which joint moved')) {
      const horn = person.horns.find((each) => Math.abs(each.pulseUs() - 1500) > 20);
      return at(horn?.joint ?? 'none');
    }
    if (ask.startsWith('Did its angle rise')) {
      const horn = person.horns.find((each) => Math.abs(each.pulseUs() - 1500) > 20) as Horn;
      return at(horn.deg(1560) > horn.deg(1500) ? 'yes' : 'no');
    }
    const stop = /^Angle at \d+ us/.exec(ask);
    if (stop !== null) {
      const joint = /(\w+) of \w+ goes outward|\w+ (\w+) goes to/.exec(
        before.split('\n').findLast((l) => /goes (outward|to)/.test(l)) ?? '',
      );
      const horn = hornOf(joint?.[1] ?? joint?.[2] ?? '');
      return at((Math.round(2 * (horn.standsDeg() + error())) / 2).toFixed(1));
    }
    if (/^At \d+ us \(Enter: it stood/.test(ask)) {
      const creeping = /(\w+) of \w+ now creeps/.exec(
        before.split('\n').findLast((l) => l.includes('now creeps')) ?? '',
      );
      const joint = creeping?.[1] ?? '';
      const standsDeg = hornOf(joint).standsDeg();
      // At the first step there is nothing to compare with.
      const moved = stood?.joint === joint && Math.abs(standsDeg - stood.deg) > SEEN_DEG;
      stood = { joint, deg: standsDeg };
      return at(moved ? 'm' : '');
    }
    if (ask.startsWith('Pose ')) {
      // Where the pot has lost its track, holding it again does not help.
      if (before.split('\n').at(-2)?.startsWith('Not taken') === true) return at('next');
      const joint =
        /\w+ (\w+) goes to/.exec(before.split('\n').findLast((l) => l.includes('goes to')) ?? '')?.[1] ?? '';
      const horn = hornOf(joint);
      const { source, deg } = person.alike(joint, horn.standsDeg());
      // Further than the leader turns: nobody can set it so.
      if (deg < stopsDeg[0] || deg > stopsDeg[1]) return at('next');
      source.go(deg + error(), 0.3);
      return at('', source.doneUs + 1e5);
    }
    throw new Error(`nobody knows what to answer: ${ask}`);
  };
}

export interface Sitting {
  readonly input: PassThrough;
  readonly table: FitTable;
  /** All that the session has printed. */
  printed(): string;
}

export function sitting(clock: VirtualClock, openPort: FitTable['openPort']): Sitting {
  const input = new PassThrough();
  const output = new PassThrough();
  let text = '';
  output.on('data', (chunk: Buffer) => (text += chunk.toString()));
  return {
    input,
    table: { clock, openPort, input, output, isTerminal: false, columns: () => 1000 },
    printed: () => text,
  };
}

const LOOK_US = 20_000;

/** Plays a whole session. `answer` may return null to do something else; the clock stands while it does. */
export async function play(
  clock: VirtualClock,
  { input, printed }: Sitting,
  session: Promise<FitEnding>,
  answer: (ask: string, before: string) => Reply | null,
  limitS: number,
): Promise<FitEnding> {
  let ended: FitEnding | null = null;
  let failed: unknown = null;
  session.then(
    (why) => (ended = why),
    (bug: unknown) => (failed = bug),
  );
  const endUs = clock.nowUs() + limitS * 1e6;
  let answered = '';
  let reply: Reply | null = null;
  for (;;) {
    clock.runTo(clock.nowUs() + LOOK_US);
    await turn();
    if (failed !== null) throw failed;
    if (ended !== null) return ended;
    if (clock.nowUs() > endUs) throw new Error(`the session has not ended:\n${printed().slice(-2000)}`);
    const text = printed();
    if (reply === null) {
      const ask = text.slice(text.lastIndexOf('\n') + 1);
      if (ask === '' || text === answered) continue;
      answered = text;
      reply = answer(ask, text);
    }
    if (reply === null || clock.nowUs() < reply.untilUs) continue;
    // As a terminal would, the person's line ends the question.
    input.write(`${reply.text}\n`);
    reply = null;
    await turn();
  }
}
