import { boardName } from './board-name.ts';
import {
  ANALOG,
  ANALOG_MAPPING,
  ANALOG_MAPPING_QUERY,
  EXTENDED_ANALOG,
  FIRMWARE,
  MODE_ANALOG,
  PIN_STATE,
  PIN_STATE_QUERY,
  putPinMode,
  REPORT_ANALOG,
  SAMPLING_INTERVAL,
  SYSEX,
  SYSEX_END,
  VERSION,
} from './firmata-messages.ts';
import { firmataOutputs } from './firmata-outputs.ts';
import { firmataReader } from './firmata-reader.ts';
import { analogRounds } from './firmata-rounds.ts';
import type { BoardPlan, Emit, Garble, WireSession } from './types.ts';

const ASK_VERSION_AND_FIRMWARE = Uint8Array.of(VERSION, SYSEX, FIRMWARE, SYSEX_END);
const ASK_MAPPING = Uint8Array.of(SYSEX, ANALOG_MAPPING_QUERY, SYSEX_END);
/** Builds of StandardFirmata report the file's extension, which protocol.md leaves out of the name. */
const EXTENSION = /\.ino$/;

/**
 * The host's side of the Firmata protocol. What is used of it, and how a restart is noticed: README.md.
 *
 * Greeting: the board reports its version and firmware by itself after a reset, or is asked; then it is asked for its
 * analog mapping. The mapping is also a fence: whatever report answers an earlier question comes before it, so a
 * report after it is one nobody asked for, and the board has restarted.
 */
export function firmataSession(plan: BoardPlan): WireSession {
  const { inputs, boardName: wanted } = plan;
  const rounds = analogRounds(inputs?.channels ?? []);
  const outputs = firmataOutputs(plan.outputs);
  const reader = firmataReader();
  const garbled = { kind: 'garbled' as const, bytes: 0, why: 'cut' as Garble };

  let stage: 'greeting' | 'mapping' | 'ready' = 'greeting';
  let versionHeard = false;
  let asked = false;
  let board: string | null = null;
  /** Major and minor protocol version of the greeting, to tell a restart from noise. */
  const version = new Uint8Array(2);

  const start = (): void => {
    stage = 'greeting';
    versionHeard = false;
    asked = false;
    board = null;
    rounds.reset();
    outputs.forget();
  };

  const restarted = (emit: Emit): void => {
    start();
    emit({ kind: 'reboot' });
  };

  const askMapping = (emit: Emit): void => {
    stage = 'mapping';
    emit({ kind: 'send', bytes: ASK_MAPPING });
  };

  const settle = (emit: Emit): void => {
    stage = 'ready';
    emit({ kind: 'ready', board });
  };

  const versionReported = (data: Uint8Array, emit: Emit): void => {
    // Noise may look like a version report, but hardly like this board's own.
    if (stage === 'ready' && data[0] === version[0] && data[1] === version[1]) restarted(emit);
    if (stage !== 'greeting') return;
    version.set(data.subarray(0, 2));
    versionHeard = true;
  };

  const firmwareReported = (data: Uint8Array, length: number, emit: Emit): void => {
    if (stage === 'ready') restarted(emit);
    if (stage !== 'greeting') return;
    const name = new Uint8Array(length >> 1);
    let end = 0;
    for (let at = 3; at + 1 < length; at += 2) {
      name[end++] = (data[at] as number) | ((data[at + 1] as number) << 7);
    }
    board = boardName(name, 0, end).replace(EXTENSION, '');
    if (wanted !== null && wanted.replace(EXTENSION, '') !== board) {
      // Its version must not make it welcome at the next nudge.
      versionHeard = false;
      return emit({ kind: 'stranger', board });
    }
    askMapping(emit);
  };

  const mapped = (data: Uint8Array, length: number, emit: Emit): void => {
    if (stage !== 'mapping') return;
    if (inputs !== null) {
      for (const channel of rounds.map(data, 1, length)) emit({ kind: 'lacks', what: 'input', channel });
      emit({ kind: 'send', bytes: samplingRequest(rounds.pins, rounds.channels, inputs.samplingMs) });
    }
    const pins = length - 1;
    outputs.learn(pins, rounds.pins);
    for (const { servos, power } of plan.outputs) {
      for (const { channel } of servos) if (channel >= pins) emit({ kind: 'lacks', what: 'output', channel });
      if (power !== null && power.channel >= pins) emit({ kind: 'lacks', what: 'output', channel: power.channel });
    }
    settle(emit);
  };

  const sysex = (data: Uint8Array, length: number, emit: Emit): void => {
    const feature = data[0] as number;
    if (feature === FIRMWARE) firmwareReported(data, length, emit);
    else if (feature === ANALOG_MAPPING) mapped(data, length, emit);
    else if (stage !== 'ready') return;
    else if (feature === PIN_STATE && length > 1) {
      emit({ kind: 'echo', id: data[1] as number, boardUs: Number.NaN });
    } else if (feature === EXTENDED_ANALOG && length > 3) {
      rounds.take(data[1] as number, (data[2] as number) | ((data[3] as number) << 7), emit);
    }
  };

  const garble = (bytes: number, why: Garble, emit: Emit): void => {
    // Boot loaders chatter, and a port opens in the midst of a message: normal until the board has greeted.
    if (stage !== 'ready' && why !== 'oversize') return;
    garbled.bytes = bytes;
    garbled.why = why;
    emit(garbled);
  };

  const heard = (emit: Emit): void => {
    const { command, data, length } = reader;
    if (command === ANALOG) {
      if (stage === 'ready') rounds.take(reader.channel, (data[0] as number) | ((data[1] as number) << 7), emit);
    } else if (command === SYSEX) sysex(data, length, emit);
    else if (command === VERSION) versionReported(data, emit);
  };

  return {
    open() {
      reader.reset();
      start();
    },
    nudge(emit) {
      if (stage === 'mapping') {
        // Followers can do without the mapping; a leader cannot.
        if (inputs === null) settle(emit);
        else askMapping(emit);
      } else if (stage === 'greeting') {
        // Firmware may be built without a name: its version alone is enough, once it has been asked for both.
        if (versionHeard && asked) return askMapping(emit);
        asked = true;
        emit({ kind: 'send', bytes: ASK_VERSION_AND_FIRMWARE });
      }
    },
    push(bytes, emit) {
      for (let at = 0; at < bytes.length; ) {
        at = reader.read(bytes, at);
        if (reader.found === 'message') heard(emit);
        else if (reader.found === 'garbled') garble(reader.bytes, reader.why, emit);
      }
    },
    frameBytesMax: (output) => outputs.bytesMax(output),
    encode: (output, frame, out) => outputs.encode(output, frame, out),
    limp: (output, out) => outputs.limp(output, out),
    power: (output, on, out) => outputs.power(output, on, out),
    echo(id, out) {
      // A pin's state may be asked at any time and is answered with the pin's number.
      out[0] = SYSEX;
      out[1] = PIN_STATE_QUERY;
      out[2] = id & 0x7f;
      out[3] = SYSEX_END;
      return 4;
    },
  };
}

/** Sampling interval, then each input as an analog one, then its reports on; in the order the board samples. */
function samplingRequest(pins: readonly number[], channels: readonly number[], samplingMs: number): Uint8Array {
  const out = new Uint8Array(5 + 5 * pins.length);
  const ms = Math.max(1, Math.min(0x3fff, Math.round(samplingMs)));
  out.set([SYSEX, SAMPLING_INTERVAL, ms & 0x7f, ms >>> 7, SYSEX_END]);
  let at = 5;
  for (const pin of pins) at = putPinMode(pin, MODE_ANALOG, out, at);
  for (const channel of channels) {
    out[at++] = REPORT_ANALOG | channel;
    out[at++] = 1;
  }
  return out;
}
