import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { compileMap } from '../../src/map/compile.ts';
import { parseAddress } from '../../src/port/address.ts';
import { simulatedBoard } from '../../src/sim/board.ts';
import { openSession } from '../../src/wire/session.ts';
import type { BoardPlan, WireEvent } from '../../src/wire/types.ts';

const plan: BoardPlan = {
  boardName: null,
  inputs: null,
  outputs: [
    {
      follower: 'wren',
      joints: ['nod'],
      servos: [{ channel: 3, minUs: 1000, maxUs: 2000, joint: 'nod' }],
      power: null,
    },
  ],
};

/** Greets, gives a command, loses the port for half a second and greets again: what the second greeting says. */
function greetedAgain(resets: boolean): WireEvent | undefined {
  const clock = virtualClock();
  const address = parseAddress('sim:arm?name=wren');
  if (address.kind !== 'sim') throw new Error('not simulated');
  const map = compileMap(
    [
      [-0.5, 1000],
      [0.5, 2000],
    ],
    'straight',
    'clamp',
  );
  const servo = { map, turns: [{ joint: 0, weight: 1 }], startRad: 0, sagRad: 0 };
  const board = simulatedBoard({
    clock,
    address,
    wire: { name: 'frames' },
    plan,
    hand: null,
    arms: [{ name: 'wren', servos: [servo] }],
    resets,
  });
  const session = openSession({ name: 'frames' }, plan);
  const greetings: WireEvent[] = [];
  const hear = (event: WireEvent): void => {
    if (event.kind === 'send') board.port.write(event.bytes);
    if (event.kind === 'ready') greetings.push({ ...event });
  };
  board.port.start({
    opened: () => session.open(hear),
    data: (bytes) => session.push(bytes, hear),
    idle() {},
    closed() {},
  });
  clock.runTo(1_000_000);
  const out = new Uint8Array(session.frameBytesMax(0));
  const frame = {
    pulsesUs: Float64Array.of(1500),
    sentUs: new Float64Array(1),
    anglesRad: new Float64Array(1),
    pulsing: 1,
  };
  board.port.write(out.subarray(0, session.encode(0, frame, out)));
  clock.runTo(1_100_000);
  board.far.unplug();
  clock.runTo(1_600_000);
  board.far.replug();
  clock.runTo(9_000_000);
  expect(greetings.length).toBe(2);
  return greetings[1];
}

describe('a board whose port comes back', () => {
  it('says that it kept its pulses when opening does not reset it', () => {
    expect(greetedAgain(false)).toEqual({ kind: 'ready', board: 'wren', kept: true });
  });

  it('says that it has none when opening resets it', () => {
    const greeting = greetedAgain(true);
    expect(greeting).toMatchObject({ kind: 'ready', board: 'wren' });
    expect(greeting).not.toMatchObject({ kept: true });
  });
});
