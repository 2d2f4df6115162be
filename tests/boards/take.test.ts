/** A take recorded from emulated boards, played to emulated boards: what the servos get, judged from the pins. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { loadRig } from '../../src/rig/load.ts';
import type { CompiledRig } from '../../src/rig/compiled.ts';
import { castFollowers, castLeader } from '../../src/take/cast.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import { player } from '../../src/take/player.ts';
import type { Take } from '../../src/take/reader.ts';
import { recorder } from '../../src/take/recorder.ts';
import { reel } from '../../src/take/reel.ts';
import { takeWriter } from '../../src/take/writer.ts';
import { headerOf, memoryDisk, opened } from '../take/studio.ts';
import type { Pulse } from './pins.ts';
import { AGE_US, NEAR_US, US_PER_DEG } from './timing.ts';
import { calm, trainOf, widthsOf } from './trains.ts';
import { troupe, voltsOf } from './troupe.ts';
import type { Troupe } from './troupe.ts';

const RIG = `
rig: two-boards
leader:
  leader: handstick
  port: serial:/dev/ttyACM0
  wire: firmata
  joints:
    - { name: base, channel: 0, points: [[112, -120], [912, 120]] }
    - { name: nod,  channel: 1, points: [[112, -120], [912, 120]], smooth: { cutoff_hz: 1.5, beta_hz_per_deg_s: 0.08 } }
followers:
  - follower: wren
    port: serial:/dev/ttyACM1
    wire: firmata
    join: { speed: 1 }
    joints:
      - { name: base, from: base, range_deg: [-80, 80], speed_deg_s: 150, accel_deg_s2: 900,
          servo: { channel: 9, points: [[-90, 560], [90, 2440]] } }
      - { name: nod, from: nod, range_deg: [-60, 60], speed_deg_s: 150, accel_deg_s2: 900,
          servo: { channel: 10, points: [[-90, 560], [90, 2440]] } }
  - follower: stork                       # on the same board
    port: serial:/dev/ttyACM1
    wire: firmata
    join: { speed: 1 }
    joints:
      - { name: base, from: base, gain: 0.4, direction: reversed, range_deg: [-20, 20], speed_deg_s: 40, accel_deg_s2: 120,
          servo: { channel: 5, points: [[-90, 560], [90, 2440]] } }
`;
/** Follower, joint, pin. */
const SERVOS = [
  ['wren', 'base', 9],
  ['wren', 'nod', 10],
  ['stork', 'base', 5],
] as const;
const FOLLOWERS = 'serial:/dev/ttyACM1';

/**
 * The Servo library counts a pulse in ticks of timer 1 at clk/8: 0.5 us at 16 MHz (arduino-libraries/Servo,
 * src/avr/Servo.cpp: `TCCR1B = _BV(CS11)`; ATmega328P datasheet, clock select bits).
 */
const TIMER_STEP_US = 0.5;

const HAND_US = 3_000_000;
const STILL_US = 600_000;
/** The hand stands, swings 25 degrees either way at 0.5 Hz, and stands again. */
const swing = (s: number): number => (s < 0.5 || s > 2.5 ? 0 : Math.sin(Math.PI * (s - 0.5)));
const countsAt = (s: number): number => 512 + (25 * 800 * swing(s)) / 240;

interface Filmed {
  readonly take: Take;
  readonly trains: ReadonlyMap<number, readonly Pulse[]>;
  readonly startUs: number;
}

function awake(): Troupe {
  const all = troupe(RIG);
  all.turn(512, 512);
  const states = (state: string): boolean => ['wren', 'stork'].every((follower) => all.state(follower) === state);
  all.until('the boards answer', 3_000_000, () => states('waking'));
  all.key('go');
  all.until('both follow', 4_000_000, () => states('following'));
  return all;
}

function trains(all: Troupe, startUs: number, toUs: number): ReadonlyMap<number, readonly Pulse[]> {
  return new Map(SERVOS.map(([, , pin]) => [pin, calm(trainOf(all.at(FOLLOWERS).board, pin, startUs, toUs))]));
}

const folder = mkdtempSync(join(tmpdir(), 'eidograph-boards-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let rig: CompiledRig;
let filmed: Filmed;

async function film(): Promise<Filmed> {
  const all = awake();
  const disk = memoryDisk();
  const startUs = all.clock.nowUs();
  const writer = takeWriter('swing', headerOf(rig, startUs), null, disk);
  const recording = recorder(all.live.drive, all.live.events$, all.clock, writer, startUs);
  for (const channel of [0, 1]) all.sway(channel, (atUs) => voltsOf(countsAt((atUs - startUs) / 1e6)));
  all.wait(HAND_US + STILL_US);
  expect(await recording.end()).toBeNull();
  const file = join(folder, 'swing.arrows');
  writeFileSync(file, disk.bytes());
  return { take: opened(file), trains: trains(all, startUs, all.clock.nowUs()), startUs };
}

/** Plays the whole take to boards that stand somewhere else. */
function played(
  all: Troupe,
  by: 'leader' | 'commands',
): { readonly trains: ReadonlyMap<number, readonly Pulse[]>; readonly startUs: number } {
  const { take } = filmed;
  const cast = { leader: castLeader(take, rig.plan, new Map()), followers: castFollowers(take, rig.plan, new Map()) };
  if (isTakeFault(cast.leader) || isTakeFault(cast.followers)) throw new Error('it is a take of this very rig');
  const rows = reel(take, { fromUs: 0, toUs: take.durationUs, speed: 1, loopBlendS: null });
  const playing = player(all.live, all.clock, rows, {
    cast: { leader: cast.leader, followers: cast.followers },
    by,
    posed: Uint8Array.of(1, 1),
    countInUs: 100_000,
    changed: () => {},
  });
  all.until('it plays', 10_000_000, () => playing.is.phase === 'playing');
  const startUs = all.clock.nowUs() - playing.is.atUs;
  all.until('it is over', 10_000_000, () => playing.is.phase === 'over');
  playing.stop();
  return { trains: trains(all, startUs, all.clock.nowUs()), startUs };
}

interface Told {
  readonly tUs: number;
  readonly us: number;
}

/** What a servo was told while the take was recorded: when, and the pulse that its angle asks for. */
function told(follower: string, joint: string): readonly Told[] {
  const { take } = filmed;
  const f = take.header.followers.findIndex(({ name }) => name === follower);
  const j = take.header.followers[f]?.joints.findIndex(({ name }) => name === joint) ?? -1;
  const commands: Told[] = [];
  for (const { tUs, followers } of take.readFrom(0)) {
    const arm = followers[f];
    if (arm?.commanded !== 1) continue;
    // 560 us at -90 degrees, 2440 at 90; Firmata speaks whole microseconds.
    commands.push({ tUs, us: Math.round(1500 + (((arm.angleRad[j] ?? Number.NaN) * 180) / Math.PI) * US_PER_DEG) });
  }
  return commands;
}

/** How far each pulse of a train is from the nearest command that it can show at its place in the take. */
function apart(train: readonly Pulse[], startUs: number, commands: readonly Told[]): readonly number[] {
  return train
    .filter(({ startUs: atUs }) => atUs - startUs > AGE_US)
    .map(({ startUs: atUs, widthUs }) => {
      const endUs = atUs + widthUs - startUs;
      const shown = commands.filter(({ tUs }) => tUs <= endUs && tUs > endUs - AGE_US);
      return Math.min(...shown.map(({ us }) => Math.abs(us - widthUs)));
    });
}

/** All pulses but those that a late interrupt has touched agree to the timer's step, and those nearly. */
function expectAgreement(pulses: readonly number[], what: string): void {
  expect(pulses.length, what).toBeGreaterThan(150);
  const stepped = pulses.filter((us) => us <= TIMER_STEP_US);
  expect(stepped.length / pulses.length, what).toBeGreaterThan(0.94);
  expect(Math.max(...pulses), what).toBeLessThan(NEAR_US);
}

const extremes = (train: readonly Pulse[] = []): readonly [number, number] => {
  const widths = widthsOf(train);
  return [Math.min(...widths), Math.max(...widths)];
};

describe('a take recorded from emulated boards', () => {
  let all: Troupe;
  beforeAll(async () => {
    const loaded = loadRig('rig.yaml', () => ({ text: RIG }));
    if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes));
    rig = loaded.rig;
    filmed = await film();
    all = awake();
    all.turn(600, 400);
    all.wait(300_000);
  });

  it('holds what the servos were told: each pulse of the recording is a command of it, to the step of the timer', () => {
    for (const [follower, joint, pin] of SERVOS) {
      const train = filmed.trains.get(pin) ?? [];
      expectAgreement(apart(train, filmed.startUs, told(follower, joint)), `${follower} ${joint}`);
      // The hand swung 25 degrees, which is 261 us of pulse, and 104 us at a gain of 0.4.
      const [least, most] = extremes(train);
      expect(most - least, `${follower} ${joint}`).toBeGreaterThan(follower === 'wren' ? 400 : 170);
    }
  });

  it.each(['commands', 'leader'] as const)('gives the same pulses to the step of the timer, played by its %s', (by) => {
    const { trains: again, startUs } = played(all, by);
    for (const [follower, joint, pin] of SERVOS) {
      const what = `${follower} ${joint}`;
      const train = again.get(pin) ?? [];
      expectAgreement(apart(train, startUs, told(follower, joint)), what);
      // Every bend is gone through. Where it turns, a frame of 20 ms is off its peak by at most 261 us * (pi * 0.01)^2 / 2.
      const [least, most] = extremes(train);
      const [leastThen, mostThen] = extremes(filmed.trains.get(pin));
      expect(Math.abs(least - leastThen), what).toBeLessThan(TIMER_STEP_US + 1.5);
      expect(Math.abs(most - mostThen), what).toBeLessThan(TIMER_STEP_US + 1.5);
      expect(
        Math.abs((train.at(-1)?.widthUs ?? 0) - (filmed.trains.get(pin)?.at(-1)?.widthUs ?? 0)),
        what,
      ).toBeLessThan(TIMER_STEP_US);
    }
  });
});
