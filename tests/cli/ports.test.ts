import { describe, expect, it } from 'vitest';
import { portLine, portsCommand } from '../../src/cli/ports.ts';
import { virtualClock } from '../../src/clock/virtual.ts';
import { parseAddress } from '../../src/port/address.ts';
import type { FoundPort, PortChange } from '../../src/port/list.ts';

const uno: FoundPort = {
  path: '/dev/ttyACM0',
  stablePath: '/dev/serial/by-id/usb-uno-if00',
  manufacturer: 'Arduino',
  serialNumber: '7573',
  mayOpen: true,
  group: null,
};
const plain: FoundPort = {
  path: '/dev/ttyUSB0',
  stablePath: '/dev/ttyUSB0',
  manufacturer: null,
  serialNumber: null,
  mayOpen: true,
  group: null,
};

const line = (port: FoundPort, kind: PortChange['kind'] = 'present'): string => portLine({ kind, port });

describe('the line of a port', () => {
  it.each([
    [line(uno), '  present  serial:/dev/serial/by-id/usb-uno-if00; Arduino; serial number 7573; now /dev/ttyACM0'],
    [line(plain), '  present  serial:/dev/ttyUSB0'],
    [line(plain, 'arrived'), '+ arrived  serial:/dev/ttyUSB0'],
    [line(plain, 'left'), '- left     serial:/dev/ttyUSB0'],
    [line(plain, 'changed'), '~ changed  serial:/dev/ttyUSB0'],
    [
      line({ ...plain, mayOpen: false, group: 'dialout' }),
      '  present  serial:/dev/ttyUSB0; you may not open it: join its group with "sudo usermod -aG dialout $USER", then log in again',
    ],
    [
      line({ ...plain, mayOpen: false }),
      '  present  serial:/dev/ttyUSB0; only root may open it: a udev rule has to give it to a group',
    ],
    [line({ ...plain, mayOpen: false }, 'left'), '- left     serial:/dev/ttyUSB0'],
  ])('is %j', (is, shouldBe) => {
    expect(is).toBe(shouldBe);
  });

  it('names an address that a rig can use', () => {
    const address = /serial:[^;]+/.exec(line(uno))?.[0] ?? '';
    expect(parseAddress(address)).toMatchObject({ kind: 'serial', path: uno.stablePath });
  });
});

describe('eidograph ports', () => {
  interface Run {
    readonly out: string[];
    readonly err: string[];
    present: readonly FoundPort[] | Error;
    isEnded: boolean;
    interrupt(): void;
    pass(): Promise<void>;
  }

  async function ports(args: readonly string[], present: readonly FoundPort[] | Error): Promise<Run> {
    const clock = virtualClock();
    const out: string[] = [];
    const err: string[] = [];
    const run: Run = {
      out,
      err,
      present,
      isEnded: false,
      interrupt: () => expect.fail('nobody listens for an interrupt'),
      async pass() {
        clock.runTo(clock.nowUs() + 500_000);
        await new Promise(setImmediate);
      },
    };
    const command = portsCommand(() => ({
      clock,
      async list() {
        if (run.present instanceof Error) throw run.present;
        return run.present;
      },
      out: { write: (text) => out.push(text) },
      err: { write: (text) => err.push(text) },
      onInterrupt(leave) {
        run.interrupt = leave;
        return () => {
          run.interrupt = () => expect.fail('the interrupt is still heard');
        };
      },
    }));
    process.exitCode = undefined;
    void command.parseAsync([...args], { from: 'user' }).then(() => {
      run.isEnded = true;
    });
    await new Promise(setImmediate);
    return run;
  }

  /** The exit status that the command asked for; put back, or it would become that of the tests. */
  function takeExitCode(): unknown {
    const code = process.exitCode;
    process.exitCode = undefined;
    return code;
  }

  it('prints the list and ends with 0 when asked once', async () => {
    const run = await ports(['--once'], [uno, plain]);
    expect(run.out).toEqual([`${line(uno)}\n`, `${line(plain)}\n`]);
    expect(run.err).toEqual([]);
    expect(run.isEnded).toBe(true);
    expect(takeExitCode()).toBe(0);
  });

  it('says what to look for when there is none, and not on stdout', async () => {
    const run = await ports(['--once'], []);
    expect(run.out).toEqual([]);
    expect(run.err.join('')).toMatch(/no serial port.*\n.*power.*\n.*driver/);
    expect(takeExitCode()).toBe(0);
  });

  it('marks what comes and goes until the user leaves, with 130', async () => {
    const run = await ports([], [uno]);
    run.present = [uno, plain];
    await run.pass();
    await run.pass();
    run.present = [plain];
    await run.pass();
    expect(run.isEnded).toBe(false);
    run.interrupt();
    run.present = [];
    await run.pass();
    expect(run.out).toEqual([line(uno), line(plain, 'arrived'), line(uno, 'left')].map((text) => `${text}\n`));
    expect(run.isEnded).toBe(true);
    expect(takeExitCode()).toBe(130);
  });

  it('prints one JSON object for each change, and nothing else', async () => {
    const run = await ports(['--json'], []);
    run.present = [{ ...uno, mayOpen: false, group: 'dialout' }];
    await run.pass();
    run.interrupt();
    await run.pass();
    expect(run.out.map((text) => JSON.parse(text))).toEqual([
      {
        change: 'arrived',
        port: 'serial:/dev/serial/by-id/usb-uno-if00',
        path: '/dev/ttyACM0',
        manufacturer: 'Arduino',
        serial_number: '7573',
        may_open: false,
        group: 'dialout',
      },
    ]);
    expect(run.out[0]).toMatch(/^[^\n]*\n$/);
    expect(run.err).toEqual([]);
    expect(takeExitCode()).toBe(130);
  });

  it('says why the ports cannot be listed: once when it goes on, and with 1 when asked once', async () => {
    const once = await ports(['--once'], new Error('no such luck'));
    expect(once.err).toEqual(['The serial ports cannot be listed: no such luck\n']);
    expect(once.isEnded).toBe(true);
    expect(takeExitCode()).toBe(1);
    const on = await ports([], new Error('no such luck'));
    await on.pass();
    on.present = [plain];
    await on.pass();
    expect(on.err[0]).toBe('The serial ports cannot be listed: no such luck\n');
    expect(on.out).toEqual([`${line(plain)}\n`]);
    on.interrupt();
    await on.pass();
    expect(takeExitCode()).toBe(130);
  });
});
