import type { Frame, WireEvent, WireSession } from '../../src/wire/types.ts';
import type { TestBoard } from './boards.ts';

/** An event that may be kept: a wire reuses its objects. */
function kept(event: WireEvent): WireEvent {
  if (event.kind === 'reading') return { ...event, counts: event.counts.slice() };
  return event.kind === 'send' ? { ...event, bytes: event.bytes.slice() } : { ...event };
}

/** All that a call tells. */
export function told(call: (emit: (event: WireEvent) => void) => void): WireEvent[] {
  const events: WireEvent[] = [];
  call((event) => events.push(kept(event)));
  return events;
}

/** Events of the pushes, in chunks of the given size (whole by default). */
export function pushed(session: WireSession, bytes: ArrayLike<number>, chunk = Number.POSITIVE_INFINITY): WireEvent[] {
  const all = Uint8Array.from(bytes);
  return told((emit) => {
    for (let at = 0; at < all.length; at += chunk) session.push(all.slice(at, at + chunk), emit);
  });
}

export function readings(events: readonly WireEvent[]): number[][] {
  return events.flatMap((event) => (event.kind === 'reading' ? [[...event.counts]] : []));
}

export function kinds(events: readonly WireEvent[]): string[] {
  return events.map((event) => event.kind);
}

/** Lets the board answer whatever the wire asked, until it asks no more (ten rounds are plenty). */
export function answered(session: WireSession, board: TestBoard, events: readonly WireEvent[]): WireEvent[] {
  const all = [...events];
  let fresh: readonly WireEvent[] = events;
  for (let round = 0; round < 10; round++) {
    const asked = fresh.flatMap((event) => (event.kind === 'send' ? [event.bytes] : []));
    if (asked.length === 0) return all;
    fresh = asked.flatMap((bytes) => pushed(session, board.answer(bytes)));
    all.push(...fresh);
  }
  throw new Error('the wire never stops asking');
}

/** Opens the wire on a board that starts, up to its `ready`. */
export function connected(session: WireSession, board: TestBoard): WireEvent[] {
  const opened = told((emit) => session.open(emit));
  const started = answered(session, board, pushed(session, board.start()));
  const first = board.readyWithReading ? pushed(session, board.reading([1, 2, 3])) : [];
  return [...opened, ...started, ...first];
}

export function frameOf(
  pulsesUs: readonly number[],
  anglesDeg: readonly number[] = [],
  pulsing = pulsesUs.length,
): Frame {
  return {
    pulsesUs: Float64Array.from(pulsesUs),
    sentUs: new Float64Array(pulsesUs.length).fill(Number.NaN),
    anglesRad: Float64Array.from(anglesDeg, (deg) => (deg * Math.PI) / 180),
    pulsing,
  };
}

/** The bytes that a call writes into its buffer. */
export function written(session: WireSession, output: number, write: (out: Uint8Array) => number): number[] {
  const out = new Uint8Array(session.frameBytesMax(output));
  return [...out.subarray(0, write(out))];
}
