import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { PAUSE_MS_MAX } from '../../src/port/reopening.ts';
import { type ScriptedPort, scriptedPort } from './scripted.ts';

const HELLO = Buffer.from('hello');

function opened(...args: Parameters<typeof scriptedPort>): ScriptedPort {
  const scripted = scriptedPort(...args);
  scripted.runMs(0);
  scripted.last().opened();
  scripted.told.length = 0;
  return scripted;
}

describe('a port that cannot be opened', () => {
  it('is tried again after pauses that double from 100 ms to 5 s', () => {
    const { connections, told, last, runMs } = scriptedPort();
    runMs(0);
    for (let i = 0; i < 9; i++) {
      last().failed('PORT_MISSING', 'gone');
      runMs(PAUSE_MS_MAX);
    }
    // By hand: 100, 200, 400, 800, 1600, 3200, then 6400 is more than 5000.
    expect(told.map((line) => Number(line.split('again in ')[1]))).toEqual([
      100, 200, 400, 800, 1_600, 3_200, 5_000, 5_000, 5_000,
    ]);
    const pausesMs = connections.slice(1).map(({ startedAtUs }, i) => startedAtUs / 1_000 - i * PAUSE_MS_MAX);
    expect(pausesMs).toEqual([100, 200, 400, 800, 1_600, 3_200, 5_000, 5_000, 5_000]);
  });

  it('counts as refused when an opening takes longer than its time', () => {
    const { told, connections, runMs } = scriptedPort({ connectMs: 700 });
    runMs(699);
    expect(told).toEqual([]);
    runMs(1);
    expect(told).toEqual(['700 closed PORT_REFUSED (no answer), again in 100']);
    expect(connections[0]?.endedGently).toBe(false);
  });

  it('is not opened again before the system has let go of the former attempt', () => {
    const { last, connections, runMs } = scriptedPort({}, 0, true);
    runMs(0);
    const first = last();
    first.failed('PORT_BUSY', 'locked');
    runMs(60_000);
    expect(connections.length).toBe(1);
    first.letGo();
    expect(connections.length).toBe(2);
  });

  it('is not opened again before its pause is over, however soon the system lets go', () => {
    const { last, connections, runMs } = scriptedPort({}, 0, true);
    runMs(0);
    const first = last();
    first.failed('PORT_BUSY', 'locked');
    first.letGo();
    runMs(99);
    expect(connections.length).toBe(1);
    runMs(1);
    expect(connections.length).toBe(2);
  });
});

describe('a port that opens and is lost again', () => {
  const lostAfter = ({ last, runMs, told }: ScriptedPort, ms: number): number => {
    last().opened();
    runMs(ms);
    last().failed('PORT_CLOSED', 'unplugged');
    const pauseMs = Number(told.at(-1)?.split('again in ')[1]);
    runMs(pauseMs);
    return pauseMs;
  };

  it('has growing pauses while it keeps failing soon, and the shortest one after it was open for five seconds', () => {
    const scripted = scriptedPort();
    scripted.runMs(0);
    const pausesMs = [10, 10, 10, 4_999, 5_000, 10, 10].map((ms) => lostAfter(scripted, ms));
    expect(pausesMs).toEqual([100, 200, 400, 800, 100, 200, 400]);
  });

  it('tells each opening and each loss once, however often the system tells it', () => {
    const { last, runMs, told } = scriptedPort();
    runMs(0);
    const first = last();
    first.opened();
    first.opened();
    first.failed('PORT_CLOSED', 'unplugged');
    first.failed('PORT_CLOSED', 'again');
    first.opened();
    first.data(HELLO);
    first.sent();
    runMs(100);
    first.failed('PORT_CLOSED', 'much later');
    last().opened();
    first.data(HELLO);
    expect(told).toEqual(['0 opened', '0 closed PORT_CLOSED (unplugged), again in 100', '100 opened']);
  });

  it('takes nothing from a connection that has not opened', () => {
    const { last, runMs, told, port } = scriptedPort();
    runMs(0);
    last().data(HELLO);
    last().sent();
    expect(told).toEqual([]);
    expect(port.canTake).toBe(false);
  });

  it('says nothing of the write that was lost with it, and can take one when it opens again', () => {
    const { last, runMs, told, port } = opened();
    port.write(HELLO);
    last().failed('PORT_CLOSED', 'unplugged');
    expect(port.canTake).toBe(false);
    runMs(100);
    last().opened();
    expect(port.canTake).toBe(true);
    expect(told).toEqual(['0 closed PORT_CLOSED (unplugged), again in 100', '100 opened']);
  });
});

describe('a write', () => {
  it('stays as it was handed over until it has left, whatever becomes of the buffer it came in', () => {
    const { last, port, runMs } = opened();
    const bytes = Buffer.from('first');
    port.write(bytes);
    bytes.fill('x');
    expect(last().writes.map(String)).toEqual(['first']);
    last().failed('PORT_CLOSED', 'unplugged');
    const lost = last().writes[0];
    runMs(100);
    last().opened();
    port.write(Buffer.from('other'));
    // The system may still be reading from what the lost connection was given.
    expect(String(lost)).toBe('first');
  });

  it('takes no memory of its own when it is as long as the one before', () => {
    const { last, port } = opened();
    for (const text of ['one', 'two', 'longer']) {
      port.write(Buffer.from(text));
      last().sent();
    }
    const [one, two, longer] = last().writes;
    expect(two).toBe(one);
    expect(longer).not.toBe(two);
  });
});

describe('a write that does not leave', () => {
  it('stalls the port after half a second, which is then opened again', () => {
    const { last, runMs, told, port, connections } = opened();
    port.write(HELLO);
    runMs(499);
    expect(told).toEqual([]);
    runMs(1);
    expect(told).toEqual(['500 closed PORT_STALLED (a write did not leave within 500 ms), again in 100']);
    expect(connections[0]?.endedGently).toBe(false);
    runMs(100);
    last().opened();
    expect(port.write(HELLO)).toBe(true);
  });

  it('is given the time that the line itself needs', () => {
    const { runMs, told, port } = opened({ writeMs: 50 }, 400_000);
    port.write(HELLO);
    runMs(449);
    expect(told).toEqual([]);
    runMs(1);
    expect(told).toEqual(['450 closed PORT_STALLED (a write did not leave within 50 ms), again in 100']);
  });

  it('is timed on its own, after any number of writes that did leave', () => {
    const { last, runMs, told, port } = opened();
    for (let i = 0; i < 40; i++) {
      port.write(HELLO);
      runMs(20);
      last().sent();
    }
    runMs(10);
    port.write(HELLO);
    told.length = 0;
    runMs(1_000);
    // By hand: 40 writes of 20 ms and 10 ms make 810 ms; the last write is overdue 500 ms later.
    expect(told).toEqual(['1310 closed PORT_STALLED (a write did not leave within 500 ms), again in 100']);
  });

  it('does not stall the next connection', () => {
    const { last, runMs, told, port } = opened();
    port.write(HELLO);
    runMs(300);
    last().failed('PORT_CLOSED', 'unplugged');
    runMs(100);
    last().opened();
    port.write(HELLO);
    runMs(499);
    last().sent();
    expect(told.at(-1)).toBe('899 idle');
  });
});

describe('a port that is closed', () => {
  const isClosed = async (port: ScriptedPort['port']): Promise<boolean> =>
    Promise.race([port.close().then(() => true), new Promise<boolean>((resolve) => setImmediate(resolve, false))]);

  it('is gone at once when it was never started, while opening, when open and while it pauses', async () => {
    const opening = scriptedPort();
    opening.runMs(0);
    const open = opened();
    const pausing = opened();
    pausing.last().failed('PORT_CLOSED', 'unplugged');
    for (const { port, clock, told } of [scriptedPort(), opening, open, pausing]) {
      const before = told.length;
      expect(await isClosed(port)).toBe(true);
      expect(clock.nextUs(), 'no wake-up is left').toBe(Number.POSITIVE_INFINITY);
      expect(told.length).toBe(before);
    }
    expect(opening.last().endedGently).toBe(false);
    expect(open.last().endedGently).toBe(true);
  });

  it('waits for the write in flight', async () => {
    const { port, last, runMs, told } = opened();
    port.write(HELLO);
    runMs(0);
    expect(await isClosed(port)).toBe(false);
    runMs(199);
    expect(last().endedGently).toBeNull();
    last().sent();
    expect(last().endedGently).toBe(true);
    expect(await isClosed(port)).toBe(true);
    expect(told).toEqual([]);
  });

  it('waits for the write in flight no longer than 200 ms', async () => {
    const { port, last, runMs, told } = opened();
    port.write(HELLO);
    const closing = port.close();
    runMs(200);
    expect(last().endedGently).toBe(false);
    await closing;
    expect(told).toEqual([]);
  });

  it('does not wait for a write whose connection is lost', async () => {
    const { port, last, told } = opened();
    port.write(HELLO);
    const closing = port.close();
    last().failed('PORT_CLOSED', 'unplugged');
    await closing;
    expect(last().endedGently).toBe(false);
    expect(told).toEqual([]);
  });

  it('waits until the system has let go, but no longer than a second', async () => {
    const good = opened({}, 0, true);
    expect(await isClosed(good.port)).toBe(false);
    good.last().letGo();
    expect(await isClosed(good.port)).toBe(true);
    expect(good.clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
    const stuck = opened({}, 0, true);
    expect(await isClosed(stuck.port)).toBe(false);
    stuck.runMs(999);
    expect(await isClosed(stuck.port)).toBe(false);
    stuck.runMs(1);
    expect(await isClosed(stuck.port)).toBe(true);
  });

  it('waits also for a former connection that the system still holds', async () => {
    const { port, last, connections } = opened({}, 0, true);
    last().failed('PORT_CLOSED', 'unplugged');
    expect(await isClosed(port)).toBe(false);
    last().letGo();
    expect(await isClosed(port)).toBe(true);
    expect(connections.length).toBe(1);
  });

  it('may be closed from inside what it tells', async () => {
    const scripted = scriptedPort();
    const closings: Promise<void>[] = [];
    scripted.onTold = () => void closings.push(scripted.port.close());
    scripted.runMs(0);
    scripted.last().failed('PORT_BUSY', 'locked');
    expect(closings.length).toBe(1);
    await Promise.all(closings);
    scripted.runMs(60_000);
    expect(scripted.connections.length).toBe(1);
    expect(scripted.told.length).toBe(1);
  });

  it('cannot be started again', async () => {
    const { port } = scriptedPort();
    await port.close();
    expect(() => port.start({ opened() {}, data() {}, idle() {}, closed() {} })).toThrow(/closed before/);
  });
});

describe('whatever the system tells, in whatever order', () => {
  const step = fc.oneof(
    fc.record({ does: fc.constantFrom('opened', 'sent', 'failed', 'data', 'letGo'), who: fc.nat(3) }),
    fc.record({ does: fc.constant('write'), who: fc.constant(0) }),
    fc.record({ does: fc.constant('wait'), who: fc.nat(6_000) }),
  );

  it('opened and closed take turns, idle follows a write, canTake is exact, and nothing follows close', () => {
    fc.assert(
      fc.property(fc.array(step, { maxLength: 60 }), fc.boolean(), fc.nat(60), (script, holdsOn, closesAt) => {
        const { port, connections, told, runMs } = scriptedPort({}, 0, holdsOn);
        let closedAfter = Number.POSITIVE_INFINITY;
        let isOpen = false;
        let inFlight = false;
        let seen = 0;
        const keepUp = (): void => {
          for (; seen < told.length; seen++) {
            const what = told[seen]?.split(' ')[1];
            expect(seen, 'nothing follows close').toBeLessThan(closedAfter);
            const mayBeTold = { opened: !isOpen && !inFlight, idle: isOpen && inFlight, data: isOpen, closed: true };
            expect(mayBeTold[what as keyof typeof mayBeTold]).toBe(true);
            if (what !== 'data') inFlight = false;
            if (what === 'opened' || what === 'closed') isOpen = what === 'opened';
          }
          expect(port.canTake).toBe(isOpen && !inFlight && closedAfter === Number.POSITIVE_INFINITY);
        };
        for (const [i, { does, who }] of script.entries()) {
          if (i === closesAt) {
            void port.close();
            closedAfter = told.length;
          }
          const connection = connections[connections.length - 1 - who];
          const could = port.canTake;
          const took = does === 'write' && port.write(HELLO);
          expect(took).toBe(does === 'write' && could);
          inFlight ||= took;
          if (does === 'wait') runMs(who);
          else if (does === 'failed') connection?.failed('PORT_CLOSED', 'unplugged');
          else if (does === 'data') connection?.data(HELLO);
          else if (does === 'opened') connection?.opened();
          else if (does === 'sent') connection?.sent();
          else if (does === 'letGo' && connection?.endedGently !== null) connection?.letGo();
          keepUp();
        }
        const waiting = connections.filter(({ endedGently }) => endedGently === null);
        expect(waiting.length, 'one connection at a time').toBeLessThanOrEqual(1);
      }),
    );
  });
});
