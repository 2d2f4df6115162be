import { US_PER_MS } from '../clock/clock.ts';
import { decodeFromHost, encodeFromBoard, type FromBoard, type FromHost } from '../wire/frames-board.ts';
import { FRAME_BYTES_MAX, frameReader } from '../wire/frames-layout.ts';
import type { BoardPlan } from '../wire/types.ts';
import type { Firmware, Pins } from './firmware.ts';

/** Firmware written for this project's own wire: names itself, stamps its time, answers echoes. */
const SAMPLING_US = 5 * US_PER_MS;

interface Use {
  readonly output: number;
  readonly servo: number;
}

export function framesBoard(name: string, plan: BoardPlan, pins: Pins): Firmware {
  const channels = plan.inputs?.channels ?? [];
  const servoAt = new Map<number, Use>();
  plan.outputs.forEach(({ servos }, output) =>
    servos.forEach(({ channel }, servo) => servoAt.set(channel, { output, servo })),
  );
  const reader = frameReader();
  const out = new Uint8Array(FRAME_BYTES_MAX);
  const firstChannel = Math.min(...channels);
  const row = new Float64Array(channels.length === 0 ? 0 : Math.max(...channels) - firstChannel + 1);
  let sequence = 0;
  let pulsing = false;

  /** A lost frame has used up its number: that is how its loss is noticed. */
  const say = (message: FromBoard, lost: boolean): void => {
    const length = encodeFromBoard(message, sequence, pins.boardUs(), out);
    sequence = (sequence + 1) & 0xff;
    if (!lost) pins.send(out.subarray(0, length));
  };

  const outputs = extent(
    plan.outputs.flatMap(({ servos, power }) => [...servos.map((servo) => servo.channel), power?.channel ?? -1]),
  );
  const hello = (started: boolean): void =>
    say({ kind: 'hello', started, pulsing, inputs: extent(channels), outputs, name }, false);

  const drive = (channel: number, pulseUs: number): void => {
    const use = servoAt.get(channel);
    if (use !== undefined) pins.pulse(use.output, use.servo, pulseUs);
  };

  const obey = (heard: FromHost): void => {
    switch (heard.kind) {
      case 'hello':
        hello(false);
        break;
      case 'command':
        if (pins.loses()) break;
        heard.channels.forEach((channel, i) => drive(channel, heard.pulsesUs[i] as number));
        pulsing = true;
        break;
      case 'limp':
        for (const channel of heard.channels) drive(channel, Number.NaN);
        pulsing = false;
        break;
      case 'power':
        plan.outputs.forEach(({ power }, output) => {
          if (power?.channel === heard.channel) pins.power(output, heard.high === (power.on === 'high'));
        });
        break;
      case 'echo':
        say({ kind: 'echo', id: heard.id }, false);
        break;
    }
  };

  return {
    start: () => hello(true),
    receive(bytes) {
      for (let at = 0; at < bytes.length; ) {
        at = reader.read(bytes, at);
        const heard = reader.found === 'frame' ? decodeFromHost(reader.payload, reader.length) : null;
        if (heard !== null) obey(heard);
      }
    },
    sample() {
      const counts = pins.read();
      row.fill(Number.NaN);
      channels.forEach((channel, input) => (row[channel - firstChannel] = counts[input] as number));
      say({ kind: 'readings', firstChannel, counts: row }, pins.loses());
    },
    samplingUs: SAMPLING_US,
  };
}

/** How many channels a board has that has all of these. */
function extent(channels: readonly number[]): number {
  return Math.min(255, Math.max(-1, ...channels) + 1);
}
