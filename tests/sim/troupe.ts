import { virtualClock, type VirtualClock } from '../../src/clock/virtual.ts';
import { compileMap } from '../../src/map/compile.ts';
import type { Address } from '../../src/port/address.ts';
import { type SimulatedBoard, simulatedBoard, type SimulatedBoardOptions } from '../../src/sim/board.ts';
import type { HandInput } from '../../src/sim/hand.ts';
import type { ArmServoOptions } from '../../src/sim/servo-arm.ts';
import type { WireChoice } from '../../src/wire/choice.ts';
import { openSession } from '../../src/wire/session.ts';
import type { BoardPlan, Frame, WireEvent, WireSession } from '../../src/wire/types.ts';

export const DEG = Math.PI / 180;
export const S = 1_000_000;
export const MS = 1_000;

/** Servos of 180 degrees over 1856 us. */
const MAP = compileMap(
  [
    [-90 * DEG, 544],
    [90 * DEG, 2400],
  ],
  'straight',
  'clamp',
);

export function simAddress(text: string): Extract<Address, { kind: 'sim' }> {
  const [place, query = ''] = text.split('?') as [string, string?];
  const what = place === 'sim:hand' ? 'hand' : 'arm';
  return { kind: 'sim', text, what, options: new Map(new URLSearchParams(query)) };
}

const JOINT: HandInput = {
  kind: 'joint',
  travelMin: 60,
  travelMax: 970,
  restCounts: 512,
  countsPerRad: 910 / (240 * DEG),
};

/** Three joints and a button, and an arm of two joints whose power hangs on channel 8. */
export const PLAN: BoardPlan = {
  boardName: null,
  inputs: { channels: [0, 1, 3, 4], names: ['base', 'shoulder', 'elbow', 'pedal'], samplingMs: 10 },
  outputs: [
    {
      follower: 'wren',
      joints: ['shoulder', 'elbow'],
      servos: [
        { channel: 5, minUs: 544, maxUs: 2400, joint: 'shoulder' },
        { channel: 21, minUs: 544, maxUs: 2400, joint: 'elbow' },
      ],
      power: { channel: 8, on: 'high' },
    },
  ],
};

export const HAND = {
  countsMin: 0,
  countsMax: 1023,
  inputs: [JOINT, JOINT, JOINT, { kind: 'button' as const, restCounts: 1000 }],
};

export function armServo(joint: number, startDeg: number, changes: Partial<ArmServoOptions> = {}): ArmServoOptions {
  return { map: MAP, turns: [{ joint, weight: 1 }], startRad: startDeg * DEG, sagRad: startDeg * DEG, ...changes };
}

export const WIRES: Record<WireChoice['name'], WireChoice> = {
  lines: {
    name: 'lines',
    lines: {
      separator: null,
      sends: 'always',
      checksum: 'xor',
      template: 'W{shoulder.us},{elbow.us}\n',
      limp: 'limp\n',
      powerOn: 'on\n',
      powerOff: 'off\n',
    },
  },
  frames: { name: 'frames' },
  firmata: { name: 'firmata' },
};

/** A board, and the least that the bridge does with one: writes what the wire wants written, and listens. */
export interface Stage {
  readonly clock: VirtualClock;
  readonly board: SimulatedBoard;
  readonly session: WireSession;
  /** Every event's kind, in order. */
  readonly heard: WireEvent['kind'][];
  readonly echoes: readonly { readonly id: number; readonly boardUs: number }[];
  readonly readings: { readonly atUs: number; readonly counts: readonly number[] }[];
  run(forUs: number): void;
  /** Sends one command to output 0 with all its pulses, and returns them as the wire rounded them. */
  command(anglesDeg: readonly number[]): readonly number[];
  /** Sends the bytes that `encode` writes. */
  say(encode: (out: Uint8Array) => number): void;
  /** Sends any bytes. */
  send(bytes: Uint8Array): void;
}

export function stage(wire: WireChoice['name'] | WireChoice, changes: Partial<SimulatedBoardOptions> = {}): Stage {
  const clock = virtualClock();
  const choice = typeof wire === 'string' ? WIRES[wire] : wire;
  const plan = changes.plan ?? PLAN;
  const board = simulatedBoard({
    clock,
    address: simAddress('sim:arm?name=wren&seed=3'),
    wire: choice,
    plan,
    hand: plan.inputs === null ? null : HAND,
    arms: [{ name: 'wren', servos: [armServo(0, -60), armServo(1, 30)] }],
    ...changes,
  });
  const session = openSession(choice, plan);
  const heard: WireEvent['kind'][] = [];
  const readings: { atUs: number; counts: number[] }[] = [];
  const echoes: { id: number; boardUs: number }[] = [];
  const queue: Uint8Array[] = [];

  const flush = (): void => {
    const next = queue[0];
    if (next !== undefined && board.port.write(next)) queue.shift();
  };
  const emit = (event: WireEvent): void => {
    heard.push(event.kind);
    if (event.kind === 'send') queue.push(event.bytes.slice());
    if (event.kind === 'echo') echoes.push({ id: event.id, boardUs: event.boardUs });
    if (event.kind === 'reading') readings.push({ atUs: clock.nowUs(), counts: [...event.counts] });
    flush();
  };
  board.port.start({
    opened() {
      queue.length = 0;
      session.open(emit);
    },
    data: (bytes) => session.push(bytes, emit),
    idle: flush,
    closed() {},
  });

  const send = (bytes: Uint8Array): void => {
    queue.push(bytes);
    flush();
  };
  const say = (encode: (out: Uint8Array) => number): void => {
    const out = new Uint8Array(session.frameBytesMax(0));
    send(out.slice(0, encode(out)));
  };
  return {
    clock,
    board,
    session,
    heard,
    echoes,
    readings,
    run: (forUs) => clock.runTo(clock.nowUs() + forUs),
    command(anglesDeg) {
      const frame: Frame = {
        pulsesUs: Float64Array.from(anglesDeg, (deg) => MAP.value(deg * DEG)),
        sentUs: new Float64Array(anglesDeg.length),
        anglesRad: Float64Array.from(anglesDeg, (deg) => deg * DEG),
        pulsing: anglesDeg.length,
      };
      say((out) => session.encode(0, frame, out));
      return [...frame.sentUs];
    },
    say,
    send,
  };
}
