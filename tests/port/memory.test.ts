import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { virtualClock } from '../../src/clock/virtual.ts';
import { type FarEnd, type MemoryPortOptions, memoryPort } from '../../src/port/memory.ts';
import type { Port } from '../../src/port/types.ts';

interface Pipe {
  readonly port: Port;
  readonly far: FarEnd;
  /** What either end was told, with the instant in microseconds. */
  readonly told: string[];
  run(us: number): void;
}

function pipe(options: MemoryPortOptions = {}, lateUs?: () => number): Pipe {
  const clock = virtualClock(0, lateUs);
  const { port, far } = memoryPort(clock, 'sim:arm?name=wren', options);
  const told: string[] = [];
  const tell = (what: string): void => void told.push(`${clock.nowUs()} ${what}`);
  far.listen({
    opened: () => tell('far opened'),
    data: (bytes) => tell(`far ${Buffer.from(bytes).toString()}`),
    closed: () => tell('far closed'),
  });
  port.start({
    opened: () => tell('opened'),
    data: (bytes) => tell(`near ${Buffer.from(bytes).toString()}`),
    idle: () => tell('idle'),
    closed: (fault, retryMs) => tell(`closed ${fault.code}, again in ${retryMs}`),
  });
  return { port, far, told, run: (us) => clock.runTo(clock.nowUs() + us) };
}

function openPipe(options: MemoryPortOptions = {}): Pipe {
  const all = pipe(options);
  all.run((options.openMs ?? 0) * 1_000);
  all.told.length = 0;
  return all;
}

describe('a memory port', () => {
  it('opens on the clock, the far end first: a board sees DTR rise before anybody can speak to it', () => {
    const { far, told, run } = pipe({ openMs: 2 });
    expect(far.isOpen).toBe(false);
    run(1_999);
    expect(told).toEqual([]);
    run(1);
    expect(told).toEqual(['2000 far opened', '2000 opened']);
    expect(far.isOpen).toBe(true);
  });

  it('clocks a write out at ten bits a byte and is idle when the last byte has arrived', () => {
    const { port, told, run } = openPipe({ baud: 115_200 });
    port.write(Buffer.from('abc'));
    run(1_000);
    // By hand: ceil(n * 10 / 115200 s): 87, 174, 261 us.
    expect(told).toEqual(['87 far a', '174 far b', '261 far c', '261 idle']);
  });

  it('takes no time without a baud rate, and yet never answers from inside a call', () => {
    const { port, far, told, run } = openPipe();
    port.write(Buffer.from('abc'));
    far.write(Buffer.from('def'));
    expect(told).toEqual([]);
    run(0);
    expect(told).toEqual(['0 far abc', '0 idle', '0 near def']);
  });

  it('loses what the far end sends while nobody has it open, and what does not fit', () => {
    const { port, far, told, run } = pipe({ baud: 9_600, openMs: 1 });
    expect(far.write(Buffer.from('early'))).toBe(0);
    run(1_000);
    expect(far.write(new Uint8Array(70_000))).toBe(65_536);
    expect(far.write(new Uint8Array(1))).toBe(0);
    void port.close();
    run(100);
    expect(far.write(Buffer.from('late'))).toBe(0);
    expect(told.filter((line) => line.includes('near'))).toEqual([]);
    expect(told.at(-1)).toBe('1000 far closed');
  });
});

describe('the far end of a memory port', () => {
  it('that is unplugged loses what was under way in both directions', () => {
    const { port, far, told, run } = openPipe({ baud: 9_600 });
    port.write(Buffer.from('ab'));
    far.write(Buffer.from('cd'));
    run(1_500);
    far.unplug();
    far.replug();
    run(101_500);
    // By hand: a byte takes 1041.7 us at 9600 baud, so one byte of two has passed either way.
    expect(told).toEqual([
      '1042 far a',
      '1042 near c',
      '1500 far closed',
      '1500 closed PORT_CLOSED, again in 100',
      '101500 far opened',
      '101500 opened',
    ]);
    expect(port.canTake).toBe(true);
  });

  it('that stays unplugged, or is held by another program, says so at each attempt', () => {
    const { far, told, run } = openPipe();
    far.unplug('PORT_BUSY');
    run(400_000);
    far.replug();
    run(400_000);
    expect(told.filter((line) => !line.includes('far'))).toEqual([
      '0 closed PORT_CLOSED, again in 100',
      '100000 closed PORT_BUSY, again in 200',
      '300000 closed PORT_BUSY, again in 400',
      '700000 opened',
    ]);
  });

  it('that blocks keeps the write in flight until it is released', () => {
    const { port, far, told, run } = openPipe({ baud: 115_200 });
    far.block();
    port.write(Buffer.from('ab'));
    run(300_000);
    expect(port.canTake).toBe(false);
    far.release();
    run(1_000);
    expect(told).toEqual(['300087 far a', '300174 far b', '300174 idle']);
  });

  it('that blocks too long stalls the port, and what was in flight never arrives', () => {
    const { port, far, told, run } = openPipe();
    far.block();
    port.write(Buffer.from('stale'));
    run(600_000);
    far.release();
    port.write(Buffer.from('fresh'));
    run(1_000);
    expect(told).toEqual([
      '500000 closed PORT_STALLED, again in 100',
      '500000 far closed',
      '600000 far opened',
      '600000 opened',
      '600000 far fresh',
      '600000 idle',
    ]);
  });

  it('that slows down takes longer for each byte', () => {
    const { port, far, told, run } = openPipe({ baud: 1_000_000 });
    far.setBaud(1_000);
    port.write(Buffer.from('ab'));
    run(100_000);
    expect(told).toEqual(['10000 far a', '20000 far b', '20000 idle']);
  });

  it('may corrupt what arrives, in either direction, and lose it', () => {
    const { port, far, told, run } = openPipe();
    far.corrupt((bytes, toward) => (toward === 'far' ? bytes.map((byte) => byte ^ 1) : bytes.subarray(0, 0)));
    port.write(Buffer.from('abc'));
    far.write(Buffer.from('lost'));
    run(0);
    far.corrupt(null);
    far.write(Buffer.from('whole'));
    run(0);
    // By hand: the lowest bit of a, b, c turned over gives the backquote, c, b.
    expect(told).toEqual(['0 far `cb', '0 idle', '0 near whole']);
  });

  it('may vanish from inside what it is told', () => {
    const { port, far, told, run } = openPipe();
    far.listen({ data: () => far.unplug() });
    port.write(Buffer.from('the last straw'));
    run(0);
    expect(told).toEqual(['0 closed PORT_CLOSED, again in 100']);
    expect(port.canTake).toBe(false);
  });
});

describe('the same script on a memory port', () => {
  const act = fc.record({
    afterUs: fc.nat(300_000),
    act: fc.constantFrom('write', 'far write', 'unplug', 'replug', 'block', 'release', 'slow', 'fast'),
  });

  it('is told the same, word for word', () => {
    const play = (script: readonly { afterUs: number; act: string }[], lateness: readonly number[]): string[] => {
      let asked = 0;
      const all = pipe({ baud: 57_600 }, () => lateness[asked++ % lateness.length] ?? 0);
      const { port, far, told, run } = all;
      const acts: Record<string, () => unknown> = {
        write: () => port.write(Buffer.from('command')),
        'far write': () => far.write(Buffer.from('reading')),
        unplug: () => far.unplug(),
        replug: () => far.replug(),
        block: () => far.block(),
        release: () => far.release(),
        slow: () => far.setBaud(1_200),
        fast: () => far.setBaud(null),
      };
      for (const { afterUs, act } of script) {
        run(afterUs);
        acts[act]?.();
      }
      run(10_000_000);
      return told;
    };
    fc.assert(
      fc.property(fc.array(act, { maxLength: 30 }), fc.array(fc.nat(15_000), { minLength: 1 }), (script, lateness) => {
        expect(play(script, lateness)).toEqual(play(script, lateness));
      }),
    );
  });
});
