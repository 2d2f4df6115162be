import type { Outlet } from '../../src/cli/outlet.ts';
import type { Terminal, TerminalListener } from '../../src/cli/terminal.ts';
import type { Size } from '../../src/cli/view/scene.ts';
import type { World, WorldListener } from '../../src/cli/world.ts';
import { virtualClock, type VirtualClock } from '../../src/clock/virtual.ts';

/** The world around a run, on a virtual clock: what it prints, a terminal with somebody at it, signals. */
export interface Stage {
  readonly clock: VirtualClock;
  readonly world: World;
  out(): string;
  err(): string;
  /** The picture on the terminal now, without colours. */
  screen(): string;
  readonly bells: () => number;
  /** Whether the terminal is the program's now. */
  readonly isOpen: () => boolean;
  type(text: string): void;
  resize(size: Size): void;
  hangUp(): void;
  signal(name: 'SIGINT' | 'SIGTERM' | 'SIGHUP'): void;
  closeOut(code: string): void;
  bug(fault: unknown): void;
  /** Lets time pass, with everything that hangs on promises. */
  pass(ms: number): Promise<void>;
  /** Lets time pass until the run has ended, and says how. */
  ended(run: Promise<number>, limitMs?: number): Promise<number>;
}

const STEP_US = 5_000;

export function stage(options: { terminal: boolean; env?: NodeJS.ProcessEnv; size?: Size }): Stage {
  const clock = virtualClock(1_000_000);
  const printed = { out: '', err: '' };
  const outletTo = (name: 'out' | 'err'): Outlet => ({
    write(text) {
      printed[name] += text;
    },
    offer(text) {
      printed[name] += text;
      return true;
    },
    flush: () => Promise.resolve(),
  });
  let size = options.size ?? { columns: 100, rows: 40 };
  let picture: readonly string[] = [];
  let bells = 0;
  let hands: TerminalListener | null = null;
  let world: WorldListener | null = null;
  const terminal: Terminal = {
    size: () => size,
    open(hear) {
      hands = hear;
    },
    draw(lines) {
      picture = lines;
    },
    bell() {
      bells++;
    },
    close() {
      hands = null;
    },
  };

  const turn = async (): Promise<void> => {
    clock.runTo(clock.nowUs() + STEP_US);
    // A run's end goes through a handful of promises, none of which waits for anything but the clock.
    for (let i = 0; i < 10; i++) await Promise.resolve();
  };

  return {
    clock,
    world: {
      clock,
      env: { LANG: 'C.UTF-8', NO_COLOR: '1', ...options.env },
      out: outletTo('out'),
      err: outletTo('err'),
      terminal: options.terminal ? terminal : null,
      listen(to) {
        world = to;
        return () => {
          world = null;
        };
      },
    },
    out: () => printed.out,
    err: () => printed.err,
    screen: () => picture.join('\n').replaceAll(/\x1b\[[\d;]*m/g, ''),
    bells: () => bells,
    isOpen: () => hands !== null,
    type: (text) => hands?.keys(text),
    resize(to) {
      size = to;
      hands?.resized();
    },
    hangUp: () => hands?.gone(),
    signal: (name) => world?.signal(name),
    closeOut: (code) => world?.outClosed(Object.assign(new Error(code), { code })),
    bug: (fault) => world?.bug(fault),
    async pass(ms) {
      for (let step = 0; step < (ms * 1_000) / STEP_US; step++) await turn();
    },
    async ended(run, limitMs = 60_000) {
      let status: number | null = null;
      void run.then((value) => {
        status = value;
      });
      for (let step = 0; step < (limitMs * 1_000) / STEP_US && status === null; step++) await turn();
      if (status === null) throw new Error(`the run has not ended within ${limitMs} ms`);
      return status;
    },
  };
}
