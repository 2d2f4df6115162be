import { EventEmitter } from 'node:events';
import { beforeEach, describe, expect, it } from 'vitest';
import { type VirtualClock, virtualClock } from '../../src/clock/virtual.ts';
import { type SerialDevice, type SerialOpenOptions, serialPort } from '../../src/port/serial.ts';
import type { Port } from '../../src/port/types.ts';

type Done = (error: Error | null) => void;

/** A stand-in for the library's port that does nothing by itself and writes down what is asked of it. */
class Device extends EventEmitter implements SerialDevice {
  isOpen = false;
  opening = true;
  closing = false;
  readonly asked: string[] = [];
  readonly options: SerialOpenOptions;
  private readonly waiting = new Map<string, Done>();

  constructor(options: SerialOpenOptions) {
    super();
    this.options = options;
  }

  private ask(what: string, done: Done): void {
    this.asked.push(what);
    this.waiting.set(what.split(' ')[0] ?? '', done);
  }

  write(bytes: Uint8Array, done: Done): boolean {
    this.ask(`write ${Buffer.from(bytes).toString()}`, done);
    return true;
  }
  set(lines: object, done: Done): void {
    this.ask(`set ${JSON.stringify(lines)}`, done);
  }
  flush(done: Done): void {
    this.ask('flush', done);
  }
  drain(done: Done): void {
    this.ask('drain', done);
  }
  close(done: Done): void {
    this.closing = true;
    this.isOpen = false;
    this.ask('close', done);
  }

  answer(what: string, error: Error | null = null): void {
    const done = this.waiting.get(what);
    if (done === undefined) throw new Error(`${what} was not asked`);
    this.waiting.delete(what);
    if (what === 'close') {
      this.closing = false;
      this.emit('close');
    }
    done(error);
  }
  opens(): void {
    this.opening = false;
    this.isOpen = true;
    this.emit('open');
  }
  refuses(message: string): void {
    this.opening = false;
    this.emit('error', new Error(message));
  }
}

let clock: VirtualClock;
let devices: Device[];
let told: string[];
let port: Port;

// A path that is no file of this machine: the watch over device files is tested with real ones.
const address = { kind: 'serial', text: 'serial:COM3', path: 'COM3', baud: null } as const;

const device = (): Device => devices.at(-1) ?? expect.fail('no device was made');
const run = async (ms: number): Promise<void> => {
  clock.runTo(clock.nowUs() + ms * 1_000);
  // The library is loaded and the device made in promises.
  await new Promise(setImmediate);
};

beforeEach(async () => {
  clock = virtualClock();
  devices = [];
  told = [];
  port = serialPort(address, clock, {
    baudDefault: 57_600,
    async open(options) {
      devices.push(new Device(options));
      return device();
    },
  });
  const tell = (what: string): void => void told.push(`${clock.nowUs() / 1_000} ${what}`);
  port.start({
    opened: () => tell('opened'),
    data: (bytes) => tell(`data ${Buffer.from(bytes).toString()}`),
    idle: () => tell('idle'),
    closed: ({ code }) => tell(code),
  });
  await run(0);
});

const open = (): void => {
  device().opens();
  device().answer('set');
  device().asked.length = 0;
  told.length = 0;
};

describe('opening a serial port', () => {
  it('asks for the baud rate of the wire when the address names none, and never lets DTR fall on close', () => {
    expect(device().options).toEqual({ path: 'COM3', baudRate: 57_600, hupcl: false });
  });

  it('asks for the baud rate of the address before that of the wire', async () => {
    const other = serialPort({ ...address, baud: 9_600 }, clock, {
      baudDefault: 57_600,
      async open(options) {
        devices.push(new Device(options));
        return device();
      },
    });
    other.start({ opened() {}, data() {}, idle() {}, closed() {} });
    await run(0);
    expect(device().options.baudRate).toBe(9_600);
  });

  it('sets DTR, RTS and low latency together, and is open only then', () => {
    device().opens();
    expect(device().asked).toEqual(['set {"dtr":true,"rts":true,"lowLatency":true}']);
    expect(told).toEqual([]);
    device().answer('set');
    expect(told).toEqual(['0 opened']);
  });

  it('does without these lines where there are none, as on a pseudo-terminal', () => {
    device().opens();
    device().answer('set', new Error('Error: Inappropriate ioctl for device, cannot set'));
    expect(told).toEqual(['0 opened']);
  });

  it('reads from the start: a port that nobody reads does not notice an unplug', () => {
    expect(device().listenerCount('data')).toBe(1);
    open();
    device().emit('data', Buffer.from('reading'));
    expect(told).toEqual(['0 data reading']);
  });

  it('that is refused makes a new device for the next attempt', async () => {
    device().refuses('Error: Permission denied, cannot open COM3');
    expect(told).toEqual(['0 PORT_FORBIDDEN']);
    await run(100);
    expect(devices.length).toBe(2);
    expect(devices[0]?.asked).toEqual([]);
  });

  it('whose library cannot be loaded is a fault like any other', async () => {
    const faults: string[] = [];
    const broken = serialPort(address, clock, { open: () => Promise.reject(new Error('no native build')) });
    broken.start({
      opened() {},
      data() {},
      idle() {},
      closed: ({ code, detail }) => void faults.push(`${code} ${detail}`),
    });
    await run(0);
    expect(faults).toEqual(['PORT_FAILED no native build']);
    await run(100);
    expect(faults.length).toBe(2);
    await broken.close();
  });

  it('that takes too long is awaited before the device is closed, and before another is made', async () => {
    await run(5_000);
    expect(told).toEqual(['5000 PORT_REFUSED']);
    await run(60_000);
    expect(devices.length).toBe(1);
    device().opens();
    device().answer('flush');
    device().answer('close');
    expect(devices[0]?.asked).toEqual(['flush', 'close']);
    await run(0);
    expect(devices.length).toBe(2);
    expect(told.length).toBe(1);
  });
});

describe('losing a serial port', () => {
  it('is told once, though close fires twice', async () => {
    open();
    const lost = device();
    lost.isOpen = false;
    lost.closing = true;
    lost.emit('error', new Error('Input/output error'));
    lost.emit('close');
    lost.closing = false;
    lost.emit('close');
    lost.emit('close');
    expect(told).toEqual(['0 PORT_CLOSED']);
    expect(lost.asked).toEqual([]);
    await run(100);
    expect(devices.length).toBe(2);
  });

  it('waits for the library to end a closing of its own before another device is made', async () => {
    open();
    device().isOpen = false;
    device().closing = true;
    device().emit('close');
    await run(60_000);
    expect(devices.length).toBe(1);
    device().closing = false;
    device().emit('close');
    await run(0);
    expect(devices.length).toBe(2);
  });

  it('leaves a listener for errors that come later', async () => {
    open();
    device().isOpen = false;
    device().emit('close');
    expect(() => devices[0]?.emit('error', new Error('Canceled'))).not.toThrow();
    await run(100);
    expect(told.length).toBe(1);
  });
});

describe('writing to a serial port', () => {
  // By hand: 3 bytes at 57600 baud are 30 / 57600 s = 520.8 us, rounded up.
  it('is idle when the bytes have passed the line, not when the system has taken them', async () => {
    open();
    port.write(Buffer.from('abc'));
    device().answer('write');
    clock.runTo(520);
    expect(port.canTake).toBe(false);
    clock.runTo(521);
    expect(told).toEqual(['0.521 idle']);
    expect(port.canTake).toBe(true);
  });

  it('is idle at once when the system took longer than the line', async () => {
    open();
    port.write(Buffer.from('abc'));
    await run(20);
    device().answer('write');
    expect(told).toEqual(['20 idle']);
  });

  it('that fails is not idle: the loss is told by the device', () => {
    open();
    port.write(Buffer.from('abc'));
    device().answer('write', new Error('Input/output error'));
    clock.runTo(10_000);
    expect(told).toEqual([]);
    device().isOpen = false;
    device().emit('close');
    expect(told).toEqual(['10 PORT_CLOSED']);
  });

  it('that stalls throws away what the system still holds, then closes, and reopens when that is done', async () => {
    open();
    port.write(Buffer.from('stale'));
    await run(501);
    expect(told).toEqual(['500.869 PORT_STALLED']);
    expect(device().asked).toEqual(['write stale', 'flush']);
    device().answer('flush');
    device().answer('close');
    expect(device().asked).toEqual(['write stale', 'flush', 'close']);
    await run(100);
    expect(devices.length).toBe(2);
  });

  it('that stalls closes also when throwing away takes too long', async () => {
    open();
    port.write(Buffer.from('stale'));
    await run(501);
    await run(100);
    expect(device().asked).toEqual(['write stale', 'flush', 'close']);
    device().answer('flush');
    expect(device().asked).toEqual(['write stale', 'flush', 'close']);
  });
});

describe('closing a serial port', () => {
  it('drains once, throws nothing away, closes and waits for each', async () => {
    open();
    let closed = false;
    const closing = port.close().then(() => {
      closed = true;
    });
    device().answer('drain');
    await run(0);
    expect(closed).toBe(false);
    device().answer('close');
    await closing;
    expect(device().asked).toEqual(['drain', 'close']);
    expect(told).toEqual([]);
    expect(clock.nextUs()).toBe(Number.POSITIVE_INFINITY);
  });

  it('gives draining and throwing away no more than their time', async () => {
    open();
    void port.close();
    await run(199);
    expect(device().asked).toEqual(['drain']);
    await run(1);
    expect(device().asked).toEqual(['drain', 'flush']);
    await run(100);
    expect(device().asked).toEqual(['drain', 'flush', 'close']);
  });

  it('does not drain what is stuck', async () => {
    open();
    port.write(Buffer.from('stuck'));
    void port.close();
    await run(200);
    expect(device().asked).toEqual(['write stuck', 'flush']);
  });

  it('waits for an opening that is under way', async () => {
    const closing = port.close();
    expect(device().asked).toEqual([]);
    device().opens();
    expect(device().asked).toEqual(['flush']);
    device().answer('flush');
    device().answer('close');
    await closing;
    expect(told).toEqual([]);
  });

  it('that meets an unplug waits for the library to have closed', async () => {
    open();
    const closing = port.close();
    device().isOpen = false;
    device().closing = true;
    device().answer('drain', new Error('Error: Input/output error, cannot drain'));
    expect(device().asked).toEqual(['drain']);
    device().closing = false;
    device().emit('close');
    await closing;
    expect(device().asked).toEqual(['drain']);
  });
});
