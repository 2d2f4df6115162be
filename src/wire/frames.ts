import { boardName } from './board-name.ts';
import {
  BOARD_HEAD,
  commandBytes,
  FRAMES_VERSION,
  FROM_BOARD,
  FROM_HOST,
  frameReader,
  HELLO_HEAD,
  HELLO_PULSING,
  HELLO_STARTED,
  HOST_HEAD,
  NO_COUNT,
  PAYLOAD_BYTES_MAX,
  PULSE_STEPS_PER_US,
  READINGS_HEAD,
  SERVO_BYTES,
  SERVOS_MAX,
  seal,
  sealedBytes,
  u16,
  u32,
} from './frames-layout.ts';
import { type PulseGrid, pulseGrid, pulseSteps } from './pulse-grid.ts';
import type { BoardPlan, Emit, Frame, Garble, OutputWiring, WireSession } from './types.ts';

const WRAP_US = 2 ** 32;
const US_PER_STEP = 1 / PULSE_STEPS_PER_US;
/** Board time that steps back by less is a frame that came late (UDP reorders), by more a board that restarted. */
const LATE_US = 1_000_000;

/** Where a payload is put together before it is sealed: one for all sessions, because each call is done with it. */
const outgoing = new Uint8Array(PAYLOAD_BYTES_MAX);

/** The host's side of the `frames` wire. Layout and rules: README.md. */
export function framesSession(plan: BoardPlan): WireSession {
  const channels = plan.inputs?.channels ?? [];
  const inputOfChannel = new Int16Array(256).fill(-1);
  channels.forEach((channel, input) => (inputOfChannel[channel] = input));
  const grids = plan.outputs.map((output) => pulseGrid(output.servos, PULSE_STEPS_PER_US));
  const channelsOf = plan.outputs.map(({ servos }) => Uint8Array.from(servos, (servo) => servo.channel));
  for (const { follower, servos } of plan.outputs) {
    if (servos.length > SERVOS_MAX) throw new RangeError(`${follower} has more than ${SERVOS_MAX} servos`);
  }

  const reader = frameReader();
  const greeting = new Uint8Array(1 + sealedBytes(HOST_HEAD));
  const reading = { kind: 'reading' as const, counts: new Float64Array(channels.length), boardUs: Number.NaN };
  const garbled = { kind: 'garbled' as const, bytes: 0, why: 'cut' as Garble };
  const lost = { kind: 'lost' as const, frames: 0 };
  // Times live in a typed array: a closure variable would allocate a fresh number at each reading.
  const time = new Float64Array(2);
  const RAW = 0;
  const UNWRAPPED = 1;
  let ready = false;
  let sequence = 0;
  let expected = -1;

  const head = (type: number): number => {
    outgoing[0] = type;
    outgoing[1] = sequence;
    sequence = (sequence + 1) & 0xff;
    return HOST_HEAD;
  };

  const ask = (emit: Emit): void => {
    // The zero in front ends whatever noise the board has in its buffer since it started.
    greeting[0] = 0;
    const end = seal(outgoing, head(FROM_HOST.hello), greeting, 1);
    emit({ kind: 'send', bytes: greeting.subarray(0, end) });
  };

  const garble = (bytes: number, why: Garble, emit: Emit): void => {
    // A cut frame and a boot loader's chatter are normal until the board has greeted.
    if (!ready && why !== 'oversize') return;
    garbled.bytes = bytes;
    garbled.why = why;
    emit(garbled);
  };

  /** From the last time known to this one: forward, over a wrap if need be, or a little back. */
  const stepUs = (rawUs: number): number => {
    const ahead = rawUs - (time[RAW] as number);
    const wrapped = ahead < 0 ? ahead + WRAP_US : ahead;
    return wrapped > WRAP_US - LATE_US ? wrapped - WRAP_US : wrapped;
  };

  /** Back by more than any wrap explains. Asked of readings only: a board that only echoes may be silent for an hour. */
  const jumpedBack = (rawUs: number): boolean => rawUs < (time[RAW] as number) && stepUs(rawUs) >= WRAP_US / 2;

  const advance = (rawUs: number, byUs: number): void => {
    time[RAW] = rawUs;
    time[UNWRAPPED] = (time[UNWRAPPED] as number) + byUs;
  };

  const count = (arrived: number, emit: Emit): void => {
    const gap = expected < 0 ? 0 : (arrived - expected) & 0xff;
    expected = (arrived + 1) & 0xff;
    if (gap === 0) return;
    lost.frames = gap;
    emit(lost);
  };

  const restarted = (emit: Emit): void => {
    ready = false;
    expected = -1;
    emit({ kind: 'reboot' });
  };

  const lacks = (inputs: number, outputs: number, emit: Emit): void => {
    for (const channel of channels) if (channel >= inputs) emit({ kind: 'lacks', what: 'input', channel });
    for (const { servos, power } of plan.outputs) {
      for (const { channel } of servos) if (channel >= outputs) emit({ kind: 'lacks', what: 'output', channel });
      if (power !== null && power.channel >= outputs) {
        emit({ kind: 'lacks', what: 'output', channel: power.channel });
      }
    }
  };

  const hello = (payload: Uint8Array, length: number, emit: Emit): void => {
    if (length < HELLO_HEAD || payload[BOARD_HEAD] !== FRAMES_VERSION) return garble(length, 'syntax', emit);
    const flags = payload[BOARD_HEAD + 1] as number;
    const started = (flags & HELLO_STARTED) !== 0;
    const rawUs = u32(payload, 2);
    if (ready && !started && !jumpedBack(rawUs)) return count(payload[1] as number, emit);
    if (ready) restarted(emit);
    const board = boardName(payload, HELLO_HEAD, length);
    if (plan.boardName !== null && plan.boardName !== board) return emit({ kind: 'stranger', board });
    time[RAW] = time[UNWRAPPED] = rawUs;
    expected = -1;
    count(payload[1] as number, emit);
    lacks(payload[BOARD_HEAD + 2] as number, payload[BOARD_HEAD + 3] as number, emit);
    ready = true;
    emit({ kind: 'ready', board, kept: !started && (flags & HELLO_PULSING) !== 0 });
  };

  const readings = (payload: Uint8Array, length: number, emit: Emit): void => {
    if (length < READINGS_HEAD || (length - READINGS_HEAD) % 2 !== 0) return garble(length, 'count', emit);
    const rawUs = u32(payload, 2);
    if (jumpedBack(rawUs)) {
      restarted(emit);
      return ask(emit);
    }
    const byUs = stepUs(rawUs);
    if (byUs < 0) return;
    advance(rawUs, byUs);
    count(payload[1] as number, emit);
    reading.counts.fill(Number.NaN);
    let channel = payload[BOARD_HEAD] as number;
    let given = 0;
    for (let at = READINGS_HEAD; at < length && channel < 256; at += 2, channel++) {
      const input = inputOfChannel[channel] as number;
      const value = u16(payload, at);
      if (input < 0 || value === NO_COUNT) continue;
      reading.counts[input] = value;
      given++;
    }
    if (given === 0) return;
    reading.boardUs = time[UNWRAPPED] as number;
    emit(reading);
  };

  const echoed = (payload: Uint8Array, length: number, emit: Emit): void => {
    if (length !== BOARD_HEAD + 2) return garble(length, 'count', emit);
    count(payload[1] as number, emit);
    const rawUs = u32(payload, 2);
    const byUs = stepUs(rawUs);
    const boardUs = (time[UNWRAPPED] as number) + byUs;
    if (byUs > 0) advance(rawUs, byUs);
    emit({ kind: 'echo', id: u16(payload, BOARD_HEAD), boardUs });
  };

  const heard = (payload: Uint8Array, length: number, emit: Emit): void => {
    const type = payload[0] as number;
    if (type === FROM_BOARD.hello) return hello(payload, length, emit);
    if (!ready) return;
    if (type === FROM_BOARD.readings) readings(payload, length, emit);
    else if (type === FROM_BOARD.echo) echoed(payload, length, emit);
    else garble(length, 'syntax', emit);
  };

  return {
    open(emit) {
      reader.reset();
      ready = false;
      expected = -1;
      sequence = 0;
      ask(emit);
    },
    nudge(emit) {
      if (!ready) ask(emit);
    },
    push(bytes, emit) {
      for (let at = 0; at < bytes.length; ) {
        at = reader.read(bytes, at);
        if (reader.found === 'frame') heard(reader.payload, reader.length, emit);
        else if (reader.found === 'garbled') garble(reader.bytes, reader.why, emit);
      }
    },
    frameBytesMax(output) {
      return Math.max(commandBytes((plan.outputs[output] as OutputWiring).servos.length), sealedBytes(HOST_HEAD + 2));
    },
    encode(output, frame, out) {
      const wired = channelsOf[output] as Uint8Array;
      return putCommand(head(FROM_HOST.command), wired, grids[output] as PulseGrid, frame, out);
    },
    limp(output, out) {
      let at = head(FROM_HOST.limp);
      for (const { channel } of (plan.outputs[output] as OutputWiring).servos) outgoing[at++] = channel;
      return seal(outgoing, at, out, 0);
    },
    power(output, on, out) {
      const { power } = plan.outputs[output] as OutputWiring;
      if (power === null) return 0;
      const at = head(FROM_HOST.power);
      outgoing[at] = power.channel;
      outgoing[at + 1] = on === (power.on === 'high') ? 1 : 0;
      return seal(outgoing, at + 2, out, 0);
    },
    echo(id, out) {
      const at = head(FROM_HOST.echo);
      outgoing[at] = id & 0xff;
      outgoing[at + 1] = (id >>> 8) & 0xff;
      return seal(outgoing, at + 2, out, 0);
    },
  };
}

/** Puts the servos of a command behind its head of `at` bytes and seals it into `out`; returns its length there. */
function putCommand(
  at: number,
  channels: Uint8Array,
  grid: PulseGrid,
  { pulsesUs, sentUs, pulsing }: Frame,
  out: Uint8Array,
): number {
  let end = at;
  for (let servo = 0; servo < channels.length; servo++) {
    const steps = pulseSteps(grid, servo, pulsesUs[servo] as number);
    sentUs[servo] = steps * US_PER_STEP;
    if (servo >= pulsing) continue;
    outgoing[end] = channels[servo] as number;
    outgoing[end + 1] = steps & 0xff;
    outgoing[end + 2] = steps >>> 8;
    end += SERVO_BYTES;
  }
  return seal(outgoing, end, out, 0);
}
