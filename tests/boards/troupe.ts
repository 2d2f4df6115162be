import { live } from '../../src/bridge/live.ts';
import type { Live } from '../../src/bridge/live.ts';
import type { Word } from '../../src/bridge/board.ts';
import type { WakeMemory } from '../../src/bridge/wake-memory.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import type { VirtualClock } from '../../src/clock/virtual.ts';
import type { Key } from '../../src/drive/events.ts';
import type { FollowerStage } from '../../src/drive/follower-stage.ts';
import type { State } from '../../src/follower/states.ts';
import { loadRig } from '../../src/rig/load.ts';
import type { ReadFile } from '../../src/rig/file-reader.ts';
import type { Volts } from './chip.ts';
import type { UnoBoard } from './uno.ts';
import { wiredBoard } from './wired.ts';
import type { WiredBoard } from './wired.ts';

/** A rig as an operator writes it, live over emulated boards: every board of it on one virtual clock. */
export interface Troupe {
  readonly clock: VirtualClock;
  readonly live: Live;
  /** Everything the operator has been told, in order. */
  readonly words: readonly Word[];
  /** The board at an address of the rig. */
  at(address: string): WiredBoard;
  /** Turns the leader's pots, from A0 on, to where the converter reads these counts. */
  turn(...counts: readonly number[]): void;
  /** Lets one of the leader's analog inputs see a voltage that changes by itself. */
  sway(channel: number, volts: Volts): void;
  key(key: Key, follower?: string): void;
  state(follower: string): State;
  stage(follower: string): FollowerStage;
  wait(us: number): void;
  /** Runs on until `come` is true, looking every 5 ms; throws when it is not within `limitUs`. Returns the instant. */
  until(what: string, limitUs: number, come: () => boolean): number;
}

/** The reference of an Uno's converter, and its steps (ATmega328P datasheet, "ADC Conversion Result"). */
const VREF = 5;
const ADC_COUNTS = 1_024;

/** The middle of the voltages that the converter reads as `counts`. */
export const voltsOf = (counts: number): number => ((counts + 0.5) * VREF) / ADC_COUNTS;

const RIG_FILE = 'rig.yaml';
const LOOK_US = 5_000;

/** Texts of files by name; the rig is `rig.yaml`. */
export type RigFiles = Readonly<Record<string, string>>;

export interface TroupeOptions {
  readonly memory?: WakeMemory;
  /** How fast the resonators of some boards run, by address; the others run at exactly 16 MHz. */
  readonly paces?: Readonly<Record<string, number>>;
}

/** @param rig the rig's text with its profiles inline, or the texts of several files, or a rig file on the disk */
export function troupe(rig: string | RigFiles | { readonly onDisk: string }, options: TroupeOptions = {}): Troupe {
  const loaded =
    typeof rig === 'object' && 'onDisk' in rig
      ? loadRig(rig['onDisk'] as string)
      : loadRig(RIG_FILE, inMemory(typeof rig === 'string' ? { [RIG_FILE]: rig } : rig));
  if ('mistakes' in loaded) throw new Error(JSON.stringify(loaded.mistakes, null, 1));
  const clock = virtualClock();
  const wired = new Map<string, WiredBoard>();
  const words: Word[] = [];
  const driven = live({
    rig: loaded.rig,
    clock,
    openPort({ address }) {
      const board = wiredBoard(clock, address.text, { pace: options.paces?.[address.text] ?? 1 });
      wired.set(address.text, board);
      return board.port;
    },
    memory: options.memory ?? null,
    unasked: false,
    dry: false,
    say: (word) => words.push(word),
    onBug(follower, bug) {
      throw new Error(`a bug ended ${follower}`, { cause: bug });
    },
  });
  const indexOf = (follower: string): number => {
    const index = loaded.rig.plan.followers.findIndex(({ name }) => name === follower);
    if (index < 0) throw new Error(`the rig has no follower ${follower}`);
    return index;
  };
  const stage = (follower: string): FollowerStage => driven.drive.followers[indexOf(follower)] as FollowerStage;
  const at = (address: string): WiredBoard => {
    const board = wired.get(address);
    if (board === undefined) throw new Error(`the rig has no board at ${address}`);
    return board;
  };
  const leader = (): UnoBoard => at(loaded.rig.boards[0]?.address.text ?? '').board;
  const wait = (us: number): void => clock.runTo(clock.nowUs() + us);
  return {
    clock,
    live: driven,
    words,
    at,
    turn(...counts) {
      for (const [channel, count] of counts.entries()) leader().setVolts(channel, voltsOf(count));
    },
    sway: (channel, volts) => leader().setVolts(channel, volts),
    key: (key, follower) => (follower === undefined ? driven.key(key) : driven.key(key, indexOf(follower))),
    state: (follower) => stage(follower).is.state,
    stage,
    wait,
    until(what, limitUs, come) {
      const endUs = clock.nowUs() + limitUs;
      while (!come()) {
        if (clock.nowUs() >= endUs) throw new Error(`${what}: not within ${limitUs} us`);
        wait(LOOK_US);
      }
      return clock.nowUs();
    },
  };
}

const inMemory =
  (files: RigFiles): ReadFile =>
  (file) => {
    const text = files[file];
    return text === undefined ? { fault: 'missing', detail: 'it is not among the test’s files' } : { text };
  };
