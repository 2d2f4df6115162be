import { isatty, type ReadStream, type WriteStream } from 'node:tty';
import { type Clock, realClock } from '../clock/clock.ts';
import { type Outlet, outlet, toDescriptor, toStream } from './outlet.ts';
import { type Terminal, terminal } from './terminal.ts';

/** What a command that drives meets outside itself; a test is such a world too. */
export interface World {
  readonly clock: Clock;
  readonly env: NodeJS.ProcessEnv;
  readonly out: Outlet;
  readonly err: Outlet;
  /** null: no terminal with somebody at it. */
  readonly terminal: Terminal | null;
  /** Tells what happens until it is cancelled by what this returns. */
  listen(to: WorldListener): () => void;
}

export interface WorldListener {
  signal(name: 'SIGINT' | 'SIGTERM' | 'SIGHUP'): void;
  /** Nobody reads standard output any more. */
  outClosed(fault: NodeJS.ErrnoException): void;
  /** A fault of ours that nobody caught. */
  bug(fault: unknown): void;
}

const OUT = 1;
const ERR = 2;
const SIGNALS = ['SIGINT', 'SIGTERM', 'SIGHUP'] as const;

export function realWorld(): World {
  const clock = realClock();
  const env = process.env;
  let listener: WorldListener | null = null;
  const wayTo = (descriptor: number, stream: NodeJS.WriteStream): ReturnType<typeof toDescriptor> =>
    process.platform === 'win32' ? toStream(stream) : toDescriptor(descriptor);
  const out = outlet(clock, wayTo(OUT, process.stdout), (fault) => listener?.outClosed(fault));
  const err = outlet(clock, wayTo(ERR, process.stderr), () => {});
  const attended = isatty(OUT) && isatty(0) && env['TERM'] !== 'dumb';
  return {
    clock,
    env,
    out,
    err,
    terminal: attended ? terminal(process.stdin as ReadStream, process.stdout as WriteStream, OUT, out) : null,
    listen(to) {
      listener = to;
      const bug = (fault: unknown): void => to.bug(fault);
      for (const name of SIGNALS) process.on(name, to.signal);
      process.on('uncaughtException', bug);
      process.on('unhandledRejection', bug);
      return () => {
        listener = null;
        for (const name of SIGNALS) process.off(name, to.signal);
        process.off('uncaughtException', bug);
        process.off('unhandledRejection', bug);
      };
    },
  };
}
