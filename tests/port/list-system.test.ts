import { chmodSync, chownSync, mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { ListPorts } from '../../src/port/list.ts';
import { groupOf, type LibraryPort, systemPorts } from '../../src/port/list-system.ts';

const UNO = 'usb-Arduino__www.arduino.cc__0043_7573-if00';

let root: string;
let dev: string;
let asked: number;

const library = (ports: readonly LibraryPort[]) => async (): Promise<readonly LibraryPort[]> => {
  asked++;
  return ports;
};
const noUdevadm = async (): Promise<readonly LibraryPort[]> => {
  asked++;
  throw new Error('spawn udevadm ENOENT');
};
const linux = (list: () => Promise<readonly LibraryPort[]>): ListPorts =>
  systemPorts({ library: list, platform: 'linux', dev, sys: join(root, 'sys'), groups: join(root, 'group') });
const plug = (name: string, byId: string | null = null): void => {
  writeFileSync(join(dev, name), '');
  if (byId === null) return;
  mkdirSync(join(dev, 'serial/by-id'), { recursive: true });
  symlinkSync(join(dev, name), join(dev, 'serial/by-id', byId));
};
const uart = (name: string, type: string): void => {
  plug(name);
  mkdirSync(join(root, 'sys/class/tty', name), { recursive: true });
  writeFileSync(join(root, 'sys/class/tty', name, 'type'), `${type}\n`);
};

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'eidograph-port-'));
  dev = join(root, 'dev');
  asked = 0;
  mkdirSync(dev);
  writeFileSync(join(root, 'group'), 'root:x:0:\ndialout:x:20:ada\nuucp:x:986:\n');
});
afterEach(() => rmSync(root, { recursive: true }));

describe('the serial ports of a Linux machine', () => {
  it('are none where there are none', async () => {
    expect(await linux(noUdevadm)()).toEqual([]);
  });

  it('have a stable name, and what the library knows of them', async () => {
    plug('ttyACM0', UNO);
    const path = join(dev, 'ttyACM0');
    const ports = await linux(library([{ path, manufacturer: 'Arduino (www.arduino.cc)', serialNumber: '7573' }]))();
    expect(ports).toEqual([
      {
        path,
        stablePath: join(dev, 'serial/by-id', UNO),
        manufacturer: 'Arduino (www.arduino.cc)',
        serialNumber: '7573',
        mayOpen: true,
        group: null,
      },
    ]);
  });

  it('are found without udevadm too', async () => {
    plug('ttyUSB0');
    plug('ttyACM0', UNO);
    const ports = await linux(noUdevadm)();
    expect(ports.map(({ stablePath }) => stablePath)).toEqual([join(dev, 'serial/by-id', UNO), join(dev, 'ttyUSB0')]);
    expect(ports.map(({ manufacturer }) => manufacturer)).toEqual([null, null]);
  });

  it('leave out what the library remembers but the machine no longer has, and what is no serial port', async () => {
    plug('tty0');
    plug('ttyprintk');
    plug('null');
    expect(await linux(library([{ path: join(dev, 'ttyACM0') }]))()).toEqual([]);
  });

  it('leave out UARTs that the machine could have and has not', async () => {
    uart('ttyS0', '4');
    uart('ttyS1', '0');
    plug('ttyS2');
    const ports = await linux(noUdevadm)();
    expect(ports.map(({ path }) => path)).toEqual([join(dev, 'ttyS0'), join(dev, 'ttyS2')]);
  });

  it('stand in the order of their numbers', async () => {
    for (const name of ['ttyACM10', 'ttyACM2', 'ttyACM1']) plug(name);
    const ports = await linux(noUdevadm)();
    expect(ports.map(({ path }) => path)).toEqual(['ttyACM1', 'ttyACM2', 'ttyACM10'].map((name) => join(dev, name)));
  });

  it('are asked of the library a few times after they changed, and not each time', async () => {
    plug('ttyACM0', UNO);
    const list = linux(noUdevadm);
    for (let i = 0; i < 10; i++) await list();
    expect(asked).toBe(3);
    plug('ttyACM1');
    for (let i = 0; i < 10; i++) await list();
    expect(asked).toBe(6);
    rmSync(join(dev, 'ttyACM1'));
    for (let i = 0; i < 10; i++) await list();
    expect(asked).toBe(9);
  });
});

// Root may open everything and give files away; others may do neither. Each half of the rule has a test it can run.
const isRoot = process.getuid?.() === 0;

describe('whether this user may open a port', () => {
  it.skipIf(isRoot)('is no for a file of no mode (root may open everything: not tested as root)', async () => {
    plug('ttyACM0');
    chmodSync(join(dev, 'ttyACM0'), 0o000);
    expect(await linux(noUdevadm)()).toMatchObject([{ mayOpen: false, group: null }]);
  });

  it.skipIf(!isRoot)(
    'names the group whose members may (only root can make such files: not tested as another)',
    async () => {
      const groups = join(root, 'group');
      plug('ttyACM0');
      const path = join(dev, 'ttyACM0');
      chmodSync(path, 0o660);
      const owned = async (gid: number, mode: number): Promise<string | null> => {
        chownSync(path, 0, gid);
        chmodSync(path, mode);
        return groupOf(path, groups);
      };
      expect(await owned(20, 0o660)).toBe('dialout');
      expect(await owned(986, 0o660)).toBe('uucp');
      expect(await owned(20, 0o640), 'a group that may only read').toBeNull();
      expect(await owned(0, 0o660), 'root').toBeNull();
      expect(await owned(4_242, 0o660), 'a group without a name').toBeNull();
    },
  );
});

describe('the serial ports of another machine', () => {
  it('are what the library lists', async () => {
    const list = systemPorts({ library: library([{ path: 'COM3', manufacturer: 'wch.cn' }]), platform: 'win32' });
    expect(await list()).toEqual([
      { path: 'COM3', stablePath: 'COM3', manufacturer: 'wch.cn', serialNumber: null, mayOpen: true, group: null },
    ]);
  });

  it('cannot be listed where the library cannot', async () => {
    await expect(systemPorts({ library: noUdevadm, platform: 'darwin' })()).rejects.toThrow('ENOENT');
  });
});

describe('the library itself', () => {
  it.skipIf(process.platform !== 'linux')('is loaded when it is needed, and gives a list or a reason', async () => {
    const ports = await systemPorts()();
    expect(Array.isArray(ports)).toBe(true);
  });
});
