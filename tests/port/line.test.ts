import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { type Line, line, lineTimeUs } from '../../src/port/line.ts';

const BYTES = Uint8Array.from({ length: 40 }, (_, i) => i);

interface Watched {
  readonly clock: ReturnType<typeof virtualClock>;
  readonly sender: Line;
  /** [instant, bytes...] of each delivery. */
  readonly arrived: number[][];
  readonly emptiedAtUs: number[];
}

function watchedLine(options: {
  baud: number | null;
  chunkBytes?: number;
  capacityBytes?: number;
  lateUs?: () => number;
}): Watched {
  const clock = virtualClock(0, options.lateUs);
  const arrived: number[][] = [];
  const emptiedAtUs: number[] = [];
  const sender = line({
    clock,
    baud: options.baud,
    chunkBytes: options.chunkBytes ?? 1,
    capacityBytes: options.capacityBytes ?? 64,
    deliver: (bytes) => arrived.push([clock.nowUs(), ...bytes]),
    emptied: () => emptiedAtUs.push(clock.nowUs()),
  });
  return { clock, sender, arrived, emptiedAtUs };
}

describe('the time of bytes on a line', () => {
  // By hand, 8N1: 10 bits a byte. 10 / 9600 s = 1041.667 us; 10 / 57600 s = 173.611 us; 10 / 115200 s = 86.806 us;
  // 22 bytes at 115200 are 220 / 115200 s = 1909.722 us. Rounded up: nothing arrives before it has left.
  it.each([
    [1, 9_600, 1_042],
    [1, 57_600, 174],
    [1, 115_200, 87],
    [22, 115_200, 1_910],
    [11_520, 115_200, 1_000_000],
  ])('%i bytes at %i baud take %i us', (bytes, baud, us) => {
    expect(lineTimeUs(bytes, baud)).toBe(us);
  });

  it('is nothing where there is no baud rate', () => {
    expect(lineTimeUs(22, null)).toBe(0);
  });
});

describe('a line', () => {
  it('without a baud rate delivers everything at once, at the same instant but later', () => {
    const { clock, sender, arrived, emptiedAtUs } = watchedLine({ baud: null });
    sender.send(BYTES.subarray(0, 3));
    sender.send(BYTES.subarray(3, 5));
    expect(arrived).toEqual([]);
    clock.runTo(0);
    expect(arrived).toEqual([[0, 0, 1, 2, 3, 4]]);
    expect(emptiedAtUs).toEqual([0]);
  });

  it('delivers each byte when its stop bit has passed, without adding up roundings', () => {
    const { clock, sender, arrived, emptiedAtUs } = watchedLine({ baud: 115_200 });
    clock.runTo(1_000);
    sender.send(BYTES.subarray(0, 22));
    clock.runTo(1_000_000);
    // By hand: 1000 + ceil(n * 86.80556): 1086.8, 1173.6, 1260.4 ... 2909.7.
    expect(arrived.slice(0, 3)).toEqual([
      [1_087, 0],
      [1_174, 1],
      [1_261, 2],
    ]);
    expect(arrived.at(-1)).toEqual([2_910, 21]);
    expect(emptiedAtUs).toEqual([2_910]);
  });

  it('gathers bytes into chunks, each at the instant of its last byte', () => {
    const { clock, sender, arrived } = watchedLine({ baud: 1_000_000, chunkBytes: 4 });
    sender.send(BYTES.subarray(0, 6));
    clock.runTo(1_000_000);
    // By hand: a byte takes 10 us at one megabaud.
    expect(arrived).toEqual([
      [40, 0, 1, 2, 3],
      [60, 4, 5],
    ]);
  });

  it('continues without a gap with what is sent meanwhile, and starts anew after silence', () => {
    const { clock, sender, arrived } = watchedLine({ baud: 1_000_000 });
    sender.send(BYTES.subarray(0, 2));
    clock.runTo(15);
    sender.send(BYTES.subarray(2, 3));
    clock.runTo(100);
    sender.send(BYTES.subarray(3, 4));
    clock.runTo(200);
    expect(arrived).toEqual([
      [10, 0],
      [20, 1],
      [30, 2],
      [110, 3],
    ]);
  });

  it('takes no more than fits, and everything again once that has left', () => {
    const { clock, sender, arrived } = watchedLine({ baud: 1_000_000, capacityBytes: 8 });
    expect(sender.send(BYTES.subarray(0, 5))).toBe(5);
    expect(sender.send(BYTES.subarray(5, 10))).toBe(3);
    expect(sender.send(BYTES.subarray(8, 9))).toBe(0);
    clock.runTo(1_000);
    expect(sender.send(BYTES.subarray(8, 16))).toBe(8);
    clock.runTo(2_000);
    expect(arrived.flatMap(([, ...bytes]) => bytes)).toEqual([...BYTES.subarray(0, 16)]);
  });

  it('stands while it is held and goes on where it stood', () => {
    const { clock, sender, arrived, emptiedAtUs } = watchedLine({ baud: 1_000_000 });
    sender.send(BYTES.subarray(0, 3));
    clock.runTo(15);
    sender.hold(true);
    clock.runTo(500);
    expect(arrived).toEqual([[10, 0]]);
    sender.hold(false);
    clock.runTo(1_000);
    expect(arrived).toEqual([
      [10, 0],
      [510, 1],
      [520, 2],
    ]);
    expect(emptiedAtUs).toEqual([520]);
  });

  it('changes speed between two bytes', () => {
    const { clock, sender, arrived } = watchedLine({ baud: 1_000_000 });
    sender.send(BYTES.subarray(0, 3));
    clock.runTo(5);
    sender.setBaud(100_000);
    clock.runTo(1_000);
    // By hand: the byte under way ends at 10 us, the next two take 100 us each.
    expect(arrived).toEqual([
      [10, 0],
      [110, 1],
      [210, 2],
    ]);
  });

  it('throws away what waits, and carries on', () => {
    const { clock, sender, arrived, emptiedAtUs } = watchedLine({ baud: 1_000_000 });
    sender.send(BYTES.subarray(0, 3));
    clock.runTo(10);
    sender.clear();
    clock.runTo(100);
    sender.send(BYTES.subarray(7, 8));
    clock.runTo(200);
    expect(arrived).toEqual([
      [10, 0],
      [110, 7],
    ]);
    expect(emptiedAtUs).toEqual([110]);
  });

  it('keeps its pace for as long as it runs', () => {
    const { clock, sender, arrived } = watchedLine({ baud: 1_200, chunkBytes: 64 });
    // By hand: 120 bytes a second for 25 seconds are 3000 bytes; 10 s are exactly 1200 bytes, where the count is rebased.
    for (let sent = 0; sent < 3_000; ) {
      const taken = sender.send(BYTES);
      sent += taken;
      if (taken === 0) clock.runTo(clock.nextUs());
    }
    clock.runTo(25_000_000);
    const count = arrived.reduce((sum, chunk) => sum + chunk.length - 1, 0);
    expect(count).toBeGreaterThanOrEqual(3_000 - 64);
    expect(count).toBeLessThanOrEqual(3_000);
  });

  it('delivers every byte once, in order, never early, whatever is sent when and however late timers are', () => {
    const sends = fc.array(
      fc.record({ afterUs: fc.nat(2_000), bytes: fc.uint8Array({ minLength: 1, maxLength: 30 }) }),
      {
        maxLength: 20,
      },
    );
    fc.assert(
      fc.property(
        sends,
        fc.constantFrom(null, 9_600, 115_200),
        fc.integer({ min: 1, max: 16 }),
        fc.array(fc.nat(15_000)),
        (script, baud, chunkBytes, lateness) => {
          let asked = 0;
          const lateUs = (): number => lateness[asked++ % Math.max(lateness.length, 1)] ?? 0;
          const { clock, sender, arrived } = watchedLine({ baud, chunkBytes, capacityBytes: 1_000, lateUs });
          const sent: number[] = [];
          const sentAtUs: number[] = [];
          for (const { afterUs, bytes } of script) {
            clock.runTo(clock.nowUs() + afterUs);
            const taken = sender.send(bytes);
            for (const byte of bytes.subarray(0, taken)) {
              sent.push(byte);
              sentAtUs.push(clock.nowUs());
            }
          }
          clock.runTo(clock.nowUs() + 60_000_000);
          expect(arrived.flatMap(([, ...bytes]) => bytes)).toEqual(sent);
          let index = 0;
          let freeUs = 0;
          for (const [atUs = 0, ...bytes] of arrived) {
            for (const _ of bytes) {
              // A byte cannot start before it is sent, nor before the one in front of it has passed; 1 us of rounding.
              freeUs = Math.max(freeUs, sentAtUs[index++] ?? 0) + (baud === null ? 0 : 10_000_000 / baud);
              expect(atUs).toBeGreaterThanOrEqual(freeUs - 1);
            }
          }
        },
      ),
    );
  });
});
