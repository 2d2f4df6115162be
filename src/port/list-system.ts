import { access, constants, readdir, readFile, realpath, stat } from 'node:fs/promises';
import { join } from 'node:path';
import type { FoundPort, ListPorts } from './list.ts';

/** What is used of what serialport lists. */
export interface LibraryPort {
  readonly path: string;
  readonly manufacturer?: string | undefined;
  readonly serialNumber?: string | undefined;
}

export interface SystemPlaces {
  /** The library's own list; on Linux it needs `udevadm`, which small systems lack, and then rejects. */
  readonly library?: () => Promise<readonly LibraryPort[]>;
  readonly platform?: NodeJS.Platform;
  /** Where Linux has its devices, what it knows of them, and who belongs to which group. */
  readonly dev?: string;
  readonly sys?: string;
  readonly groups?: string;
}

/** Devices that come and go, and those of boards that are soldered on. */
const DEVICE = /^(tty(ACM|USB|AMA|XRUSB|WCH|MFD|O|S)\d+|rfcomm\d+)$/;
const SOLDERED = /^ttyS\d+$/;

/** How often the library is asked anew after the devices have changed: it may not know of a new one at once. */
const ASKED_ANEW = 3;

/** Lists the serial ports of this machine; rejects only where there is no other way than the library's. */
export function systemPorts(places: SystemPlaces = {}): ListPorts {
  const { library = libraryPorts, platform = process.platform } = places;
  return platform === 'linux' ? linuxPorts(library, places) : async () => (await library()).map(asFound);
}

async function libraryPorts(): Promise<readonly LibraryPort[]> {
  const { SerialPort } = await import('serialport');
  return SerialPort.list();
}

function asFound({ path, manufacturer, serialNumber }: LibraryPort): FoundPort {
  const known = { manufacturer: manufacturer ?? null, serialNumber: serialNumber ?? null };
  return { path, stablePath: path, ...known, mayOpen: true, group: null };
}

/** Reads the folders of devices, which costs next to nothing, and starts the library's process only when they change. */
function linuxPorts(library: () => Promise<readonly LibraryPort[]>, places: SystemPlaces): ListPorts {
  const { dev = '/dev', sys = '/sys', groups = '/etc/group' } = places;
  let asked = 0;
  let formerNames = '';
  let described: readonly LibraryPort[] = [];
  return async () => {
    const names = (await namesIn(dev)).filter((name) => DEVICE.test(name));
    const stable = await stablePaths(join(dev, 'serial/by-id'));
    const present = (await Promise.all(names.map(async (name) => ((await exists(sys, name)) ? name : null)))).filter(
      (name) => name !== null,
    );
    const allNames = [...present, ...stable.values()].join();
    if (allNames !== formerNames) asked = 0;
    formerNames = allNames;
    if (asked++ < ASKED_ANEW) described = await library().catch(() => []);
    const ports = present.map(async (name): Promise<FoundPort> => {
      const path = join(dev, name);
      const known = described.find((port) => port.path === path) ?? { path };
      const mayOpen = await access(path, constants.R_OK | constants.W_OK).then(yes, no);
      const group = mayOpen ? null : await groupOf(path, groups);
      return { ...asFound(known), stablePath: stable.get(path) ?? path, mayOpen, group };
    });
    return Promise.all(ports);
  };
}

async function namesIn(folder: string): Promise<string[]> {
  const names = await readdir(folder).catch(() => []);
  return names.sort((one, other) => one.localeCompare(other, 'en', { numeric: true }));
}

/** The stable name of each device, by the path it has now. */
async function stablePaths(folder: string): Promise<ReadonlyMap<string, string>> {
  const links = (await namesIn(folder)).map((name) => join(folder, name));
  const targets = await Promise.all(links.map((link) => realpath(link).catch(() => link)));
  return new Map(links.map((link, i) => [targets[i] ?? link, link]));
}

/** A PC has device files for UARTs that it might have; the kernel knows those that are not there as type 0. */
async function exists(sys: string, name: string): Promise<boolean> {
  if (!SOLDERED.test(name)) return true;
  const type = await readFile(join(sys, 'class/tty', name, 'type'), 'utf8').catch(() => '');
  return type.trim() !== '0';
}

/** The group that may read and write a device, by name; null where only root may. */
export async function groupOf(path: string, groups: string): Promise<string | null> {
  const { gid, mode } = await stat(path).catch(() => ({ gid: 0, mode: 0 }));
  if (gid === 0 || (mode & 0o060) !== 0o060) return null;
  const lines = (await readFile(groups, 'utf8').catch(() => '')).split('\n');
  return lines.find((line) => line.split(':')[2] === String(gid))?.split(':')[0] ?? null;
}

const yes = (): boolean => true;
const no = (): boolean => false;
