import { Command } from '@commander-js/extra-typings';
import type { CommandUnknownOpts } from '@commander-js/extra-typings';
import { realClock } from '../clock/clock.ts';
import type { Clock } from '../clock/clock.ts';
import { systemPorts } from '../port/list-system.ts';
import { watchPorts } from '../port/list.ts';
import type { FoundPort, ListPorts, PortChange } from '../port/list.ts';

/** Where the command prints and what it watches; a test has its own. */
export interface PortsWorld {
  readonly clock: Clock;
  readonly list: ListPorts;
  readonly out: { write(text: string): unknown };
  readonly err: { write(text: string): unknown };
  /** Calls back when the user wants to leave, and returns a canceller. */
  onInterrupt(leave: () => void): () => void;
}

const MARKS = { present: ' ', arrived: '+', left: '-', changed: '~' } as const;

const NOTHING = `There is no serial port here. What to look for:
  the board has power, and its cable carries data (many that charge do not);
  the machine sees it: on Linux, lsusb names it and dmesg says which driver took it (cdc_acm, ch341, cp210x, ftdi_sio);
  in a virtual machine or a container, the device is passed on to it.
`;

/** What a port is called in a rig file. */
function addressOf({ stablePath }: FoundPort): string {
  return `serial:${stablePath}`;
}

/** Why this user may not open a port and what helps; empty where they may. */
function remedyFor({ mayOpen, group }: FoundPort): string {
  if (mayOpen) return '';
  if (group === null) return 'only root may open it: a udev rule has to give it to a group';
  return `you may not open it: join its group with "sudo usermod -aG ${group} $USER", then log in again`;
}

/** One line for people: mark, word, the address to write in a rig, and what is known of the port. */
export function portLine({ kind, port }: PortChange): string {
  const facts = [
    port.manufacturer ?? '',
    port.serialNumber === null ? '' : `serial number ${port.serialNumber}`,
    port.stablePath === port.path ? '' : `now ${port.path}`,
    kind === 'left' ? '' : remedyFor(port),
  ].filter((fact) => fact !== '');
  return `${MARKS[kind]} ${kind.padEnd(7)}  ${[addressOf(port), ...facts].join('; ')}`;
}

/** One line for programs. */
function portJson({ kind, port }: PortChange): string {
  const { path, manufacturer, serialNumber, mayOpen, group } = port;
  const rest = { path, manufacturer, serial_number: serialNumber, may_open: mayOpen, group };
  return JSON.stringify({ change: kind, port: addressOf(port), ...rest });
}

/** Prints the list and, unless `once`, what changes in it, until the user leaves; resolves with the exit status. */
function showPorts(world: PortsWorld, options: { json: boolean; once: boolean }): Promise<number> {
  const { clock, list, out, err } = world;
  return new Promise((resolve) => {
    let isFirst = true;
    const end = (status: number): void => {
      stop();
      cancelInterrupt();
      resolve(status);
    };
    const changed = (changes: readonly PortChange[]): void => {
      for (const change of changes) out.write(`${options.json ? portJson(change) : portLine(change)}\n`);
      if (isFirst && changes.length === 0 && !options.json) err.write(NOTHING);
      if (isFirst && !options.once && !options.json) err.write('Ports that come and go are shown here. Ctrl-C ends.\n');
      isFirst = false;
      if (options.once) end(0);
    };
    const troubled = (detail: string): void => {
      err.write(`The serial ports cannot be listed: ${detail}\n`);
      if (options.once) end(1);
    };
    const stop = watchPorts(clock, list, changed, troubled);
    const cancelInterrupt = world.onInterrupt(() => end(130));
  });
}

function realWorld(): PortsWorld {
  return {
    clock: realClock(),
    list: systemPorts(),
    out: process.stdout,
    err: process.stderr,
    onInterrupt(leave) {
      process.on('SIGINT', leave);
      return () => process.off('SIGINT', leave);
    },
  };
}

/** `eidograph ports` */
export function portsCommand(world: () => PortsWorld = realWorld): CommandUnknownOpts {
  return new Command('ports')
    .description('list the serial ports by the names to write in a rig, and show those that come and go')
    .option('--once', 'print the list and end')
    .option('--json', 'print one JSON object a line')
    .action(async ({ once, json }) => {
      process.exitCode = await showPorts(world(), { once: once === true, json: json === true });
    });
}
