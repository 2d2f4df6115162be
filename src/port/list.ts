import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';

/** A serial port of this machine. */
export interface FoundPort {
  /** What the system calls it at the moment: /dev/ttyACM0, COM3. */
  readonly path: string;
  /** The name to write in a rig: one that the same device keeps wherever it is plugged in, where the system has one. */
  readonly stablePath: string;
  readonly manufacturer: string | null;
  readonly serialNumber: string | null;
  /** Whether this user may open it; another program may hold it all the same. */
  readonly mayOpen: boolean;
  /** The group whose members may, where this user may not and there is one. */
  readonly group: string | null;
}

export interface PortChange {
  /** `present`: there from the start. `changed`: the same device, but what is known of it, or allowed, is new. */
  readonly kind: 'present' | 'arrived' | 'left' | 'changed';
  readonly port: FoundPort;
}

export type ListPorts = () => Promise<readonly FoundPort[]>;

const EVERY_US = 500 * US_PER_MS;

/**
 * Lists the serial ports and goes on listing them each half second.
 * @param onChange told what is present, once, though it be nothing; then what arrived, left and changed, as it happens.
 * @param onTrouble told why the ports cannot be listed, once until they can be again.
 */
export function watchPorts(
  clock: Clock,
  list: ListPorts,
  onChange: (changes: readonly PortChange[]) => void,
  onTrouble: (detail: string) => void,
): Cancel {
  let known: readonly FoundPort[] | null = null;
  let isTroubled = false;
  let isOver = false;
  let cancel: Cancel = () => {};

  const look = (): void => {
    const nextUs = clock.nowUs() + EVERY_US;
    void list()
      .then(found, troubled)
      .then(() => {
        if (!isOver) cancel = clock.at(nextUs, look);
      });
  };
  const found = (ports: readonly FoundPort[]): void => {
    isTroubled = false;
    const changes =
      known === null ? ports.map((port) => ({ kind: 'present', port }) as const) : portChanges(known, ports);
    const isFirst = known === null;
    known = ports;
    if (!isOver && (isFirst || changes.length > 0)) onChange(changes);
  };
  const troubled = (error: Error): void => {
    if (!isOver && !isTroubled) onTrouble(error.message);
    isTroubled = true;
  };

  look();
  return () => {
    isOver = true;
    cancel();
  };
}

/** What became of the ports: those that left first, then those that arrived or changed, in the order of the new list. */
export function portChanges(before: readonly FoundPort[], after: readonly FoundPort[]): readonly PortChange[] {
  const changes: PortChange[] = [];
  for (const port of before) {
    if (!after.some((other) => isSame(port, other))) changes.push({ kind: 'left', port });
  }
  for (const port of after) {
    const former = before.find((other) => isSame(other, port));
    if (former === undefined) changes.push({ kind: 'arrived', port });
    else if (!isEqual(former, port)) changes.push({ kind: 'changed', port });
  }
  return changes;
}

/** The same device: what the system did not know of it at first, its stable name above all, may come a moment later. */
function isSame(before: FoundPort, after: FoundPort): boolean {
  return (
    before.path === after.path &&
    (before.stablePath === after.stablePath || before.stablePath === before.path) &&
    (before.serialNumber === after.serialNumber || before.serialNumber === null)
  );
}

function isEqual(one: FoundPort, other: FoundPort): boolean {
  return (
    one.stablePath === other.stablePath &&
    one.manufacturer === other.manufacturer &&
    one.serialNumber === other.serialNumber &&
    one.mayOpen === other.mayOpen &&
    one.group === other.group
  );
}
