import { frameBytes } from '../../wire/abilities.ts';
import { addressOf, BITS_PER_BYTE, baudOf } from '../boards.ts';
import { outputWiring } from '../compile-follower.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { LeaderProfile } from '../schema/leader.ts';
import type { Loose } from '../shape.ts';
import { wireChoice, wireName } from '../wire-choice.ts';
import type { Note } from './note.ts';

/** An analog message of Firmata: command and channel, then 14 bits in two bytes (firmata/protocol, protocol.md). */
const FIRMATA_READING_BYTES = 3;

/** What a follower's commands take of its port. */
export interface CommandLoad {
  readonly bytes: number;
  /** Bits a second of the port; null where it has no baud rate. */
  readonly baud: number | null;
  /** Bits a second of the commands. */
  readonly bitsPerS: number;
}

/** What a follower's commands take of its port; null while a part that decides it is malformed. */
export function commandLoad(follower: Loose<FollowerProfile>): CommandLoad | null {
  const { wire, rate_hz: rateHz } = follower;
  const wiring = outputWiring(follower);
  if (wire === undefined || wiring === null || rateHz === undefined) return null;
  const bytes = frameBytes(wireChoice(wire), { boardName: null, inputs: null, outputs: [wiring] }, 0);
  return { bytes, baud: baudOfProfile(follower), bitsPerS: bytes * BITS_PER_BYTE * rateHz };
}

/** The commands of one follower must fit its port. */
export function rateRule(follower: Loose<FollowerProfile>, note: Note): void {
  const load = commandLoad(follower);
  if (load === null || load.baud === null || load.bitsPerS <= load.baud) return;
  const { bytes, baud, bitsPerS } = load;
  const wrong = `${bytes} bytes ${follower.rate_hz} times a second are ${Math.ceil(bitsPerS)} bits a second, and the port carries ${baud}`;
  note('RIG_RATE_TOO_HIGH', ['rate_hz'], wrong, rateRemedy(baud, bytes));
}

/** Followers on one port share its bits. `note` stands where the rig names the last of them. */
export function sharedRateRule(followers: readonly Loose<FollowerProfile>[], note: Note): void {
  const loads = followers.flatMap((follower) => commandLoad(follower) ?? []);
  const baud = loads[0]?.baud ?? null;
  const bitsPerS = loads.reduce((sum, load) => sum + load.bitsPerS, 0);
  // One that is too fast alone is told alone.
  if (baud === null || bitsPerS <= baud || loads.some((load) => load.bitsPerS > baud)) return;
  const names = followers.map(({ follower }) => follower ?? 'a follower').join(' and ');
  const wrong = `the commands of ${names} together are ${Math.ceil(bitsPerS)} bits a second, and their port carries ${baud}`;
  const bytes = loads.reduce((sum, load) => sum + load.bytes, 0);
  note('RIG_RATE_TOO_HIGH', [], wrong, `for each of them, ${rateRemedy(baud, bytes)}`);
}

function rateRemedy(baud: number, bytes: number): string {
  const fits = Math.floor(baud / (bytes * BITS_PER_BYTE));
  const raise = 'raise the baud on the board and here';
  return fits < 1 ? raise : `lower rate_hz to ${fits} or less, or ${raise}`;
}

/** Only firmata is told how often to read; of other boards nobody can know. */
export function samplingRule(leader: Loose<LeaderProfile>, note: Note): void {
  const baud = baudOfProfile(leader);
  const { joints = [], buttons = [], sampling_ms: samplingMs } = leader;
  if (leader.wire !== 'firmata' || baud === null || samplingMs === undefined) return;
  const bits = (joints.length + buttons.length) * FIRMATA_READING_BYTES * BITS_PER_BYTE;
  const fits = Math.ceil((bits * 1000) / baud);
  if (samplingMs >= fits) return;
  const wrong = `${bits} bits every ${samplingMs} ms do not fit ${baud} baud`;
  note('RIG_SAMPLING_TOO_FAST', ['sampling_ms'], wrong, `give sampling_ms ${fits} or more, or raise the baud`);
}

function baudOfProfile({ port, wire }: Loose<FollowerProfile> | Loose<LeaderProfile>): number | null {
  const address = addressOf(port);
  const name = wireName(wire);
  return address === null || name === null ? null : baudOf(address, name);
}
