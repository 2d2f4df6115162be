import { afterEach, describe, expect, it } from 'vitest';
import { realClock } from '../../src/clock/clock.ts';
import { serialPort } from '../../src/port/serial.ts';
import type { Port, PortFault } from '../../src/port/types.ts';
import { noPty, type Pty, pluggedPty } from './pty.ts';
import { untilReally } from './real-time.ts';

const clock = realClock();
const leftovers: (() => Promise<void>)[] = [];

interface Held {
  readonly port: Port;
  readonly faults: PortFault[];
  opened: number;
  bytes: number;
}

async function pty(far?: string): Promise<Pty> {
  const made = await pluggedPty(far);
  leftovers.push(made.dispose);
  return made;
}

function hold(path: string, baud: number, onIdle: (port: Port) => void = () => {}): Held {
  const port = serialPort({ kind: 'serial', text: `serial:${path}`, path, baud }, clock);
  leftovers.unshift(() => port.close());
  const held: Held = { port, faults: [], opened: 0, bytes: 0 };
  port.start({
    opened() {
      held.opened++;
    },
    data(bytes) {
      held.bytes += bytes.length;
    },
    idle: () => onIdle(port),
    closed: (fault) => void held.faults.push(fault),
  });
  return held;
}

afterEach(async () => {
  for (const dispose of leftovers.splice(0)) await dispose();
});

describe.skipIf(noPty !== null)(`a serial port on a pseudo-terminal${noPty === null ? '' : ` (${noPty})`}`, () => {
  it('that is held by another program is busy, and its holder is not disturbed', async () => {
    const { path } = await pty();
    const first = hold(path, 115_200);
    await untilReally('the first', () => first.opened === 1);
    const second = hold(path, 115_200);
    await untilReally('a fault', () => second.faults.length > 0);
    expect(second.faults[0]).toMatchObject({ code: 'PORT_BUSY', address: `serial:${path}` });
    await untilReally('another attempt', () => second.faults.length > 1);
    expect(first.faults).toEqual([]);
    expect(first.port.canTake).toBe(true);
  });

  it('that is unplugged while readings stream in is noticed: its reader would otherwise spin for ever', async () => {
    const device = await pty('OPEN:/dev/zero,rdonly');
    const held = hold(device.path, 115_200);
    await untilReally('a stream', () => held.bytes > 100_000);
    await device.unplug();
    await untilReally('the loss', () => held.faults.length > 0);
    expect(held.faults[0]?.code).toBe('PORT_CLOSED');
    await device.plug();
    await untilReally('reopened', () => held.opened === 2);
  });

  it('whose far end stops reading stalls, and the program goes on', async () => {
    const device = await pty();
    const held = hold(device.path, 4_000_000, (port) => void port.write(new Uint8Array(16_384)));
    await untilReally('opened', () => held.opened === 1);
    device.child()?.kill('SIGSTOP');
    held.port.write(new Uint8Array(16_384));
    await untilReally('the stall', () => held.faults.length > 0);
    expect(held.faults[0]?.code).toBe('PORT_STALLED');
    const beforeUs = clock.nowUs();
    await held.port.close();
    expect(clock.nowUs() - beforeUs).toBeLessThan(1_500_000);
  });

  it('on a path that is no terminal fails with what the system says', async () => {
    const held = hold('/dev/null', 115_200);
    await untilReally('a fault', () => held.faults.length > 0);
    expect(held.faults[0]?.code).toBe('PORT_FAILED');
    expect(held.faults[0]?.detail).toMatch(/ioctl/);
  });
});
