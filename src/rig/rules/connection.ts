import { parseAddress } from '../../port/address.ts';
import type { Address } from '../../port/address.ts';
import { WIRE_ABILITIES } from '../../wire/abilities.ts';
import type { WireAbility } from '../../wire/types.ts';
import type { Path } from '../located.ts';
import type { FollowerProfile } from '../schema/follower.ts';
import type { LeaderProfile } from '../schema/leader.ts';
import { servosOf } from '../servo-list.ts';
import type { Loose } from '../shape.ts';
import { wireName } from '../wire-choice.ts';
import { noteRepeats } from './note.ts';
import type { Note } from './note.ts';
import { columnSpan } from './spans.ts';
import type { Pairs } from './spans.ts';

type LooseLeader = Loose<LeaderProfile>;
type LooseFollower = Loose<FollowerProfile>;

/** A channel in use, for a profile's own rule and for those of a shared board. */
export interface UsedChannel {
  readonly value: number | undefined;
  readonly path: Path;
  readonly what: string;
}

/** Lowest pulse limits that firmata can hand to an AVR board: above it, the library keeps them in too few bits. */
const AVR_MIN_US_MAX = 1059;
/** The lowest upper limit it can hold. Both from arduino-libraries/Servo, src/avr/Servo.cpp: int8 steps of 4 us from 544 and 2400. */
const AVR_MAX_US_MIN = 1889;

/** What the leader asks of its port and wire must be possible there. */
export function leaderConnectionRules(leader: LooseLeader, note: Note): void {
  addressRule(leader.port, 'hand', note);
  const channels = leaderChannels(leader);
  channelRules(channels, (ability) => ability.inputChannels, leader.wire, note);
}

/** What the follower asks of its port and wire must be possible there. */
export function followerConnectionRules(follower: LooseFollower, note: Note): void {
  addressRule(follower.port, 'arm', note);
  channelRules(followerChannels(follower), (ability) => ability.servoChannels, follower.wire, note);
  const wire = wireName(follower.wire);
  if (wire === null) return;
  const servos = servosOf(follower);
  const { servosMax } = WIRE_ABILITIES[wire];
  if (servos.length > servosMax) {
    const wrong = `${servos.length} servos are more than ${wire} can drive`;
    note('RIG_SERVOS_MANY', ['joints'], wrong, `hang at most ${servosMax} on one follower, and the rest on another`);
  }
  for (const { servo, path } of servos) pulseRules(servo.points, wire, [...path, 'points'], note);
  powerRules(follower, note);
}

export function leaderChannels({ joints = [], buttons = [] }: LooseLeader): readonly UsedChannel[] {
  return [
    ...joints.map(({ channel, name }, i) => ({
      value: channel,
      path: ['joints', i, 'channel'],
      what: name ?? `joint ${i}`,
    })),
    ...buttons.map(({ channel, name }, i) => ({
      value: channel,
      path: ['buttons', i, 'channel'],
      what: name ?? `button ${i}`,
    })),
  ];
}

export function followerChannels(follower: LooseFollower): readonly UsedChannel[] {
  const servos = servosOf(follower).map(({ servo, path, joint, turns }) => ({
    value: servo.channel,
    path: [...path, 'channel'],
    what: joint === null ? `the servo of ${Object.keys(turns).join(' and ')}` : (joint.name ?? 'a joint'),
  }));
  // On lines the board's own texts switch the power: no channel is taken.
  if (follower.power === undefined || wireName(follower.wire) === 'lines') return servos;
  return [...servos, { value: follower.power.channel, path: ['power', 'channel'], what: 'power' }];
}

function addressRule(port: string | undefined, end: 'hand' | 'arm', note: Note): void {
  const address = port === undefined ? null : parseAddress(port);
  if (address === null) return;
  if (address.kind === 'mistake') note('RIG_ADDRESS', ['port'], `${address.text}: ${address.wrong}`, address.right);
  else if (address.kind === 'sim' && address.what !== end) note('RIG_ADDRESS_END', ['port'], ...wrongEnd(address, end));
}

function wrongEnd(address: Address & { kind: 'sim' }, end: 'hand' | 'arm'): readonly [string, string] {
  return [`a simulated ${address.what} cannot ${end === 'hand' ? 'lead' : 'follow'}`, `use sim:${end}`];
}

function channelRules(
  channels: readonly UsedChannel[],
  spanOf: (ability: WireAbility) => readonly [number, number],
  wire: LooseFollower['wire'],
  note: Note,
): void {
  noteRepeats(channels, (channel, path, what, former) =>
    note(
      'RIG_CHANNEL_TWICE',
      path,
      `channel ${channel} of ${what} is already that of ${former}`,
      'give each its own channel',
    ),
  );
  const name = wireName(wire);
  if (name === null) return;
  const [low, high] = spanOf(WIRE_ABILITIES[name]);
  for (const { value, path } of channels) {
    if (value === undefined || (value >= low && value <= high)) continue;
    note('RIG_CHANNEL_RANGE', path, `${name} has no channel ${value} here`, `use a channel from ${low} to ${high}`);
  }
}

function pulseRules(points: Pairs | undefined, wire: keyof typeof WIRE_ABILITIES, path: Path, note: Note): void {
  const { pulseMinUs, pulseMaxUs } = WIRE_ABILITIES[wire];
  const outside = (points ?? []).findIndex(([, pulse]) => pulse < pulseMinUs || pulse > pulseMaxUs);
  if (outside >= 0) {
    const pulse = points?.[outside]?.[1];
    const degrees = wire === 'firmata' && pulse !== undefined && pulse < pulseMinUs;
    const why = degrees ? ': the board would take it for degrees' : '';
    const right = `keep pulses within ${pulseMinUs} to ${pulseMaxUs} us; a point is [degrees, microseconds]`;
    note(
      'RIG_PULSE_BOUNDS',
      [...path, outside, 1],
      `${pulse} us is a pulse that ${wire} cannot carry safely${why}`,
      right,
    );
    return;
  }
  const span = columnSpan(points, 1);
  if (wire !== 'firmata' || span === null || (span[0] <= AVR_MIN_US_MAX && span[1] >= AVR_MAX_US_MIN)) return;
  const wrong = `the AVR servo library cannot hold ${span[0]} to ${span[1]} us as limits`;
  const right = `measure outer points at most ${AVR_MIN_US_MAX} us and at least ${AVR_MAX_US_MIN} us, or use another wire`;
  note('RIG_SERVO_LIMITS', path, wrong, right);
}

function powerRules(follower: LooseFollower, note: Note): void {
  const { stop_category: category, power, wire } = follower;
  const texts = typeof wire === 'object' ? wire.lines : undefined;
  const byText = texts?.power_on !== undefined && texts.power_off !== undefined;
  if (wireName(wire) === 'lines' && power !== undefined && !byText) {
    const right = 'give wire: { lines: { power_on: "...", power_off: "..." } } as its sketch reads them';
    note(
      'RIG_POWER_UNABLE',
      ['power'],
      'on lines the board switches power by its own texts, and they are missing',
      right,
    );
  }
  if ((texts?.power_on === undefined) !== (texts?.power_off === undefined)) {
    const wrong = 'power_on and power_off belong together';
    note('RIG_POWER_UNABLE', ['wire', 'lines'], wrong, 'give both, or neither');
  }
  if ((category === 0 || category === 1) && power === undefined && !byText && !('power' in follower)) {
    const wrong = `stop_category ${category} removes power, and nothing here can: ending the pulses does not`;
    note(
      'RIG_POWER_MISSING',
      ['stop_category'],
      wrong,
      'give power: { channel: 7, on: high }, or use stop_category: 2',
    );
  }
}
