import { boardName } from './board-name.ts';
import { linesWriter, type LinesWriter } from './lines-commands.ts';
import type { LinesOptions } from './lines-options.ts';
import { lineParser } from './lines-parser.ts';
import type { BoardPlan, Emit, Garble, WireSession } from './types.ts';

/** Longest line that is read, without its end. */
export const LINE_BYTES_MAX = 256;

const LF = 0x0a;
const CR = 0x0d;
const TAB = 0x09;
const SPACE = 0x20;
const NAME_KEY = new TextEncoder().encode('board:');

/** The `lines` wire: text that builders' own sketches print and read. Rules: README.md. */
export function linesSession(options: LinesOptions, plan: BoardPlan): WireSession {
  const parser = plan.inputs === null ? null : lineParser(plan.inputs, options);
  const writers = plan.outputs.map((output) => linesWriter(options, output));
  const changesOnly = options.sends === 'on_change';

  const line = new Uint8Array(LINE_BYTES_MAX);
  const reading = { kind: 'reading' as const, counts: parser?.counts ?? new Float64Array(0), boardUs: Number.NaN };
  const garbled = { kind: 'garbled' as const, bytes: 0, why: 'syntax' as Garble };
  let filled = 0;
  let dropping = false;
  /** The line in progress may have lost its beginning: the port opened in its midst. */
  let cut = true;
  let ready = false;
  /** It said another name: whatever it sends is not for us. */
  let strange = false;
  let board: string | null = null;

  const garble = (bytes: number, why: Garble, emit: Emit): void => {
    garbled.bytes = bytes;
    garbled.why = why;
    emit(garbled);
  };

  const settle = (emit: Emit): void => {
    ready = true;
    emit({ kind: 'ready', board });
  };

  const named = (end: number, emit: Emit): void => {
    const name = boardName(line, NAME_KEY.length, end);
    strange = plan.boardName !== null && plan.boardName !== name;
    if (strange) {
      ready = false;
      return emit({ kind: 'stranger', board: name });
    }
    board = name;
    // A board says its name when it starts: said again, it has started again.
    if (ready) {
      ready = false;
      parser?.reset();
      emit({ kind: 'reboot' });
    }
    if (parser === null) settle(emit);
  };

  const numbers = (end: number, whole: boolean, emit: Emit): void => {
    if (parser === null) {
      if (!ready) settle(emit);
      return;
    }
    if (!whole) return;
    const given = parser.parse(line, end);
    if (typeof given === 'string') {
      if (ready) garble(end + 1, given, emit);
      return;
    }
    if (given === 0) return;
    // A boot banner may hold a number; the first reading has to be a whole one.
    if (!ready && !changesOnly && given < reading.counts.length) return;
    if (!ready) settle(emit);
    emit(reading);
  };

  const ended = (emit: Emit): void => {
    let end = filled;
    while (end > 0 && isBlank(line[end - 1] as number)) end--;
    const whole = !cut;
    filled = 0;
    cut = false;
    if (end === 0) return;
    if (startsWith(line, end, NAME_KEY)) named(end, emit);
    else if (!strange) numbers(end, whole, emit);
  };

  const overflow = (emit: Emit): void => {
    // Told in portions, so that a stream without any line end (a wrong baud rate) is noticed too.
    garble(filled, 'oversize', emit);
    filled = 0;
    dropping = true;
  };

  const writer = (output: number): LinesWriter => writers[output] as LinesWriter;

  return {
    open() {
      filled = 0;
      dropping = false;
      cut = true;
      ready = false;
      strange = false;
      board = null;
      parser?.reset();
    },
    nudge(emit) {
      // A leader that speaks always is waited for; one that speaks on change may just stand still.
      if (!ready && !strange && (parser === null || changesOnly)) settle(emit);
    },
    push(bytes, emit) {
      for (let at = 0; at < bytes.length; at++) {
        const byte = bytes[at] as number;
        if (byte !== LF) {
          if (filled === LINE_BYTES_MAX) overflow(emit);
          line[filled++] = byte;
        } else if (dropping) {
          dropping = false;
          cut = false;
          garble(filled + 1, 'oversize', emit);
          filled = 0;
        } else {
          ended(emit);
        }
      }
    },
    frameBytesMax: (output) => writer(output).bytesMax,
    encode: (output, frame, out) => writer(output).encode(frame, out),
    limp: (output, out) => writer(output).limp(out),
    power: (output, on, out) => writer(output).power(on, out),
    echo: () => 0,
  };
}

function isBlank(byte: number): boolean {
  return byte === CR || byte === SPACE || byte === TAB;
}

function startsWith(line: Uint8Array, end: number, start: Uint8Array): boolean {
  if (end < start.length) return false;
  for (let at = 0; at < start.length; at++) if (line[at] !== start[at]) return false;
  return true;
}
