import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { openSession } from '../../src/wire/session.ts';
import { WIRE_ABILITIES, frameBytes } from '../../src/wire/abilities.ts';
import type { WireEvent, WireSession } from '../../src/wire/types.ts';
import { join, PLAN, type TestBoard, type WireFixture, WREN } from './boards.ts';
import { answered, connected, frameOf, kinds, pushed, readings, told } from './told.ts';

/** No wire holds more than this of one message. */
const HELD_BYTES_MAX = 257;
const NOISE_RUNS = 200;

const noise = fc.uint8Array({ maxLength: 600 });
const counts = fc.tuple(...PLAN.inputs!.channels.map(() => fc.integer({ min: 0, max: 1023 })));

/** What every wire has to keep, whatever the bytes. */
export function keepsTheContract(name: string, fixture: WireFixture): void {
  const open = (): WireSession => openSession(fixture.choice, PLAN);
  const pair = (): { session: WireSession; board: TestBoard } => {
    const session = open();
    const board = fixture.board();
    connected(session, board);
    return { session, board };
  };

  describe(`the ${name} wire`, () => {
    it('is ready once its board has greeted, and tells the board its name', () => {
      const events = connected(open(), fixture.board());
      expect(events.filter(({ kind }) => kind === 'ready')).toMatchObject([{ board: 'handstick' }]);
      expect(kinds(events)).not.toContain('garbled');
    });

    it('is ready with a board that was running before the port opened, after one nudge', () => {
      const session = open();
      const board = fixture.board();
      const events = told((emit) => session.open(emit)).filter(({ kind }) => kind !== 'send');
      // The port opens in the midst of a reading.
      events.push(...pushed(session, board.reading([11, 12, 13]).subarray(1)));
      events.push(
        ...answered(
          session,
          board,
          told((emit) => session.nudge(emit)),
        ),
      );
      events.push(...pushed(session, board.reading([21, 22, 23])));
      expect(kinds(events).filter((kind) => kind !== 'send')).toEqual(['ready', 'reading']);
      expect(readings(events)).toEqual([[21, 22, 23]]);
    });

    it('refuses a board with another name, however often it is nudged', () => {
      const session = openSession(fixture.choice, { ...PLAN, boardName: 'heron' });
      const board = fixture.board();
      const events = connected(session, board);
      for (let nudge = 0; nudge < 3; nudge++) {
        events.push(
          ...answered(
            session,
            board,
            told((emit) => session.nudge(emit)),
          ),
        );
        events.push(...pushed(session, board.reading([1, 2, 3])));
      }
      expect(events).toContainEqual({ kind: 'stranger', board: 'handstick' });
      expect(kinds(events)).not.toContain('ready');
      expect(kinds(events)).not.toContain('reading');
    });

    it('notices that its board has started again, and is ready again', () => {
      const { session, board } = pair();
      const events = answered(session, board, pushed(session, board.start()));
      events.push(...pushed(session, board.reading([4, 5, 6])));
      expect(kinds(events).filter((kind) => kind !== 'send')).toEqual(['reboot', 'ready', 'reading']);
    });

    it('forgets everything when it opens again', () => {
      const { session } = pair();
      expect(
        kinds(connected(session, fixture.board())).filter((kind) => kind === 'ready' || kind === 'reboot'),
      ).toEqual(['ready']);
    });

    it('tells the same whether bytes come whole, one by one or in pieces', () => {
      fc.assert(
        fc.property(
          fc.array(fc.oneof(noise, counts), { maxLength: 8 }),
          fc.integer({ min: 1, max: 40 }),
          (parts, chunk) => {
            const whole = pair();
            const split = pair();
            const bytes = join(...parts.map((part) => (part instanceof Uint8Array ? part : whole.board.reading(part))));
            const expected = pushed(whole.session, bytes);
            expect(pushed(split.session, bytes, chunk)).toEqual(expected);
          },
        ),
        { numRuns: NOISE_RUNS },
      );
    });

    it('reads every count of a good message', () => {
      fc.assert(
        fc.property(fc.array(counts, { minLength: 1, maxLength: 5 }), (rows) => {
          const { session, board } = pair();
          const events = pushed(session, join(...rows.map((row) => board.reading(row))));
          expect(readings(events)).toEqual(rows);
          expect(kinds(events)).not.toContain('garbled');
        }),
      );
    });

    it('survives noise: counts stay numbers, and good messages are read again', () => {
      fc.assert(
        fc.property(noise, counts, (bytes, row) => {
          const { session, board } = pair();
          const events = pushed(session, bytes);
          for (const event of events) expect(isSound(event)).toBe(true);
          // The first message may end the noise; a board that seemed to restart is greeted and configured again.
          let after = answered(session, board, pushed(session, board.reading(row)));
          for (let again = 0; again < 3; again++) {
            after = [
              ...after,
              ...answered(
                session,
                board,
                told((emit) => session.nudge(emit)),
              ),
            ];
            after = [...after, ...answered(session, board, pushed(session, board.reading(row)))];
          }
          expect(readings(after).at(-1)).toEqual(row);
        }),
        { numRuns: NOISE_RUNS },
      );
    });

    it('holds no more than one message of an endless stream, and tells what it drops', () => {
      for (let byte = 0; byte < 256; byte++) {
        const { session, board } = pair();
        const flood = new Uint8Array(5_000).fill(byte);
        const dropped = pushed(session, flood).flatMap((event) => (event.kind === 'garbled' ? [event.bytes] : []));
        expect(Math.max(0, ...dropped)).toBeLessThanOrEqual(HELD_BYTES_MAX);
        expect(dropped.reduce((sum, bytes) => sum + bytes, 0)).toBeLessThanOrEqual(flood.length + 1);
        pushed(session, board.reading([7, 8, 9]));
        expect(readings(pushed(session, board.reading([10, 11, 12])))).toEqual([[10, 11, 12]]);
      }
    });

    it('encodes within its announced size and within half a step of each pulse', () => {
      const { stepUs } = WIRE_ABILITIES[fixture.choice.name];
      const pulses = fc.tuple(
        ...WREN.servos.map(({ minUs, maxUs }) => fc.double({ min: minUs, max: maxUs, noNaN: true })),
      );
      const session = open();
      const out = new Uint8Array(1_000);
      fc.assert(
        fc.property(pulses, fc.integer({ min: 0, max: WREN.servos.length }), (pulsesUs, pulsing) => {
          const frame = frameOf(pulsesUs, [10, -20, 30], pulsing);
          const length = session.encode(0, frame, out);
          expect(length).toBeLessThanOrEqual(session.frameBytesMax(0));
          WREN.servos.forEach(({ minUs, maxUs }, servo) => {
            const sent = frame.sentUs[servo] as number;
            expect(Math.abs(sent - (pulsesUs[servo] as number))).toBeLessThanOrEqual(stepUs / 2);
            expect(sent).toBeGreaterThanOrEqual(minUs);
            expect(sent).toBeLessThanOrEqual(maxUs);
          });
        }),
      );
    });

    it('never rounds a pulse past a span that ends between two steps', () => {
      const servo = { channel: 5, minUs: 600.3, maxUs: 2399.7, joint: 'shoulder' };
      const output = { ...WREN, joints: ['shoulder'], servos: [servo] };
      const choice =
        fixture.choice.name === 'lines'
          ? { ...fixture.choice, lines: { ...fixture.choice.lines, template: '{shoulder.us}\n' } }
          : fixture.choice;
      const session = openSession(choice, { ...PLAN, outputs: [output] });
      const out = new Uint8Array(100);
      for (const pulseUs of [0, 600.3, 2399.7, 9_999]) {
        const frame = frameOf([pulseUs]);
        session.encode(0, frame, out);
        expect(frame.sentUs[0]).toBeGreaterThanOrEqual(servo.minUs);
        expect(frame.sentUs[0]).toBeLessThanOrEqual(servo.maxUs);
      }
    });

    it('lets no pulse out that is not a number', () => {
      const session = open();
      expect(() => session.encode(0, frameOf([1500, Number.NaN, 1500], [0, 0, 0]), new Uint8Array(100))).toThrow(
        RangeError,
      );
    });

    it('announces a size that its steady commands reach, and that limp, power and echo keep', () => {
      const { session } = pair();
      const out = new Uint8Array(1_000);
      const frame = frameOf([2440, 2400, 2000], [0, 0, 0]);
      session.encode(0, frame, out);
      expect(session.encode(0, frame, out)).toBe(frameBytes(fixture.choice, PLAN, 0));
      const others = [
        session.limp(0, out),
        session.power(0, true, out),
        session.power(0, false, out),
        session.echo(1, out),
      ];
      expect(Math.max(...others)).toBeLessThanOrEqual(session.frameBytesMax(0));
      expect(Math.min(...others.slice(0, 3))).toBeGreaterThan(0);
    });
  });
}

function isSound(event: WireEvent): boolean {
  if (event.kind === 'reading')
    return [...event.counts].every((count) => Number.isNaN(count) || Number.isFinite(count));
  return event.kind !== 'garbled' || event.bytes > 0;
}
