import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import { type FoundPort, type PortChange, portChanges, watchPorts } from '../../src/port/list.ts';

const uno: FoundPort = {
  path: '/dev/ttyACM0',
  stablePath: '/dev/serial/by-id/usb-uno-if00',
  manufacturer: 'Arduino',
  serialNumber: '7573',
  mayOpen: true,
  group: null,
};
const ftdi: FoundPort = {
  ...uno,
  path: '/dev/ttyUSB0',
  stablePath: '/dev/serial/by-id/usb-ftdi-if00',
  serialNumber: 'A1',
};
/** What is known of the uno in the first moment. */
const raw: FoundPort = { ...uno, stablePath: uno.path, manufacturer: null, serialNumber: null, mayOpen: false };

const said = (changes: readonly PortChange[]): string[] =>
  changes.map(({ kind, port }) => `${kind} ${port.stablePath}`);

describe('what became of the ports', () => {
  it.each([
    ['nothing, when they are the same', [uno, ftdi], [ftdi, uno], []],
    ['an arrival', [uno], [uno, ftdi], ['arrived /dev/serial/by-id/usb-ftdi-if00']],
    ['a departure', [uno, ftdi], [ftdi], ['left /dev/serial/by-id/usb-uno-if00']],
    ['a device that gets its stable name late', [raw], [uno], ['changed /dev/serial/by-id/usb-uno-if00']],
    ['a permission', [uno], [{ ...uno, mayOpen: false, group: 'dialout' }], ['changed /dev/serial/by-id/usb-uno-if00']],
    [
      'another device under the same path',
      [uno],
      [{ ...ftdi, path: uno.path }],
      ['left /dev/serial/by-id/usb-uno-if00', 'arrived /dev/serial/by-id/usb-ftdi-if00'],
    ],
    [
      'another device of the same make without stable names',
      [{ ...uno, stablePath: uno.path }],
      [{ ...uno, stablePath: uno.path, serialNumber: '9999' }],
      ['left /dev/ttyACM0', 'arrived /dev/ttyACM0'],
    ],
    [
      'the same device under another path',
      [uno],
      [{ ...uno, path: '/dev/ttyACM1' }],
      ['left /dev/serial/by-id/usb-uno-if00', 'arrived /dev/serial/by-id/usb-uno-if00'],
    ],
  ])('is %s', (_, before, after, changes) => {
    expect(said(portChanges(before, after))).toEqual(changes);
  });

  it('leads from the one list to the other when it is carried out', () => {
    const port = fc.constantFrom(uno, ftdi, raw, { ...uno, mayOpen: false }, { ...ftdi, path: '/dev/ttyACM0' });
    const ports = fc.uniqueArray(port, { selector: ({ path }) => path });
    fc.assert(
      fc.property(ports, ports, (before, after) => {
        const carried = new Map(before.map((found) => [found.path, found]));
        for (const { kind, port: found } of portChanges(before, after)) {
          if (kind === 'left') carried.delete(found.path);
          else carried.set(found.path, found);
        }
        expect(carried).toEqual(new Map(after.map((found) => [found.path, found])));
      }),
    );
  });
});

describe('the watch over the ports', () => {
  interface Watch {
    readonly clock: VirtualClock;
    readonly told: string[];
    lists: number;
    present: readonly FoundPort[] | Error;
    cancel: () => void;
    runMs(ms: number): Promise<void>;
  }

  async function watch(present: readonly FoundPort[] | Error): Promise<Watch> {
    const clock = virtualClock();
    const told: string[] = [];
    const tell = (what: string): void => void told.push(`${clock.nowUs() / 1_000} ${what}`);
    const all: Watch = {
      clock,
      told,
      lists: 0,
      present,
      cancel() {},
      async runMs(ms) {
        const endUs = clock.nowUs() + ms * 1_000;
        while (clock.nextUs() <= endUs) {
          clock.runTo(clock.nextUs());
          await new Promise(setImmediate);
        }
        clock.runTo(endUs);
      },
    };
    all.cancel = watchPorts(
      clock,
      async () => {
        all.lists++;
        if (all.present instanceof Error) throw all.present;
        return all.present;
      },
      (changes) => tell(said(changes).join(', ')),
      tell,
    );
    await new Promise(setImmediate);
    return all;
  }

  it('tells at once what is present', async () => {
    const { told } = await watch([uno, ftdi]);
    expect(told).toEqual(['0 present /dev/serial/by-id/usb-uno-if00, present /dev/serial/by-id/usb-ftdi-if00']);
  });

  it('tells also that nothing is', async () => {
    expect((await watch([])).told).toEqual(['0 ']);
  });

  it('looks each half second and tells what arrives and leaves, and else nothing', async () => {
    const all = await watch([uno]);
    await all.runMs(2_100);
    expect(all.lists).toBe(5);
    all.present = [uno, ftdi];
    await all.runMs(1_000);
    all.present = [ftdi];
    await all.runMs(1_000);
    expect(all.told.slice(1)).toEqual([
      '2500 arrived /dev/serial/by-id/usb-ftdi-if00',
      '3500 left /dev/serial/by-id/usb-uno-if00',
    ]);
  });

  it('tells a trouble once, keeps what it knew, and goes on when it is over', async () => {
    const all = await watch([uno]);
    all.present = new Error('udevadm is missing');
    await all.runMs(2_000);
    all.present = [uno, ftdi];
    await all.runMs(500);
    all.present = new Error('again');
    await all.runMs(1_000);
    expect(all.told.slice(1)).toEqual([
      '500 udevadm is missing',
      '2500 arrived /dev/serial/by-id/usb-ftdi-if00',
      '3000 again',
    ]);
  });

  it('tells what is present after a trouble at the start', async () => {
    const all = await watch(new Error('not yet'));
    all.present = [];
    await all.runMs(500);
    expect(all.told).toEqual(['0 not yet', '500 ']);
  });

  it('ends when it is cancelled, even in the middle of a look', async () => {
    const all = await watch([uno]);
    all.present = [];
    all.clock.runTo(500_000);
    all.cancel();
    await new Promise(setImmediate);
    expect(all.told.length).toBe(1);
    expect(all.clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
    const idle = await watch([uno]);
    idle.cancel();
    expect(idle.clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });
});
