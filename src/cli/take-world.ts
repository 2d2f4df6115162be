import { type Clock, realClock } from '../clock/clock.ts';

/** What a command about takes meets outside itself; a test is such a world too. */
export interface TakeWorld {
  readonly clock: Clock;
  readonly env: NodeJS.ProcessEnv;
  readonly out: { write(bytes: string | Uint8Array): unknown };
  readonly err: { write(text: string): unknown };
  /** Somebody watches standard error: long work shows how far it is. */
  readonly watched: boolean;
  /** Calls back when the user wants to leave, and returns a canceller. */
  onInterrupt(leave: () => void): () => void;
}

export function realTakeWorld(): TakeWorld {
  return {
    clock: realClock(),
    env: process.env,
    out: process.stdout,
    err: process.stderr,
    watched: process.stderr.isTTY === true,
    onInterrupt(leave) {
      process.on('SIGINT', leave);
      process.on('SIGTERM', leave);
      return () => {
        process.off('SIGINT', leave);
        process.off('SIGTERM', leave);
      };
    },
  };
}
