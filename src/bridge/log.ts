import pino, { type Level, type Logger } from 'pino';
import { type Clock, US_PER_S } from '../clock/clock.ts';

/** From the quietest to the most talkative. */
export const LOG_LEVELS = ['silent', 'fatal', 'error', 'warn', 'info', 'debug', 'trace'] as const;
export type LogLevel = (typeof LOG_LEVELS)[number];

export interface LogOptions {
  readonly level: LogLevel;
  /** For the rate limit only: lines are stamped with the time of day. */
  readonly clock: Clock;
  /** Where lines go, each with its line end: a file, standard error, or a screen that shows their `msg`. */
  readonly to: { write(line: string): void };
}

export type Log = Logger;

/** A stalled terminal or disk would stop the arms' clock with it: a burst is cut, and what was cut is counted. */
const LINES_PER_S = 20;

/** Standard error or a file, written before the call returns: only so are the last lines of a crash kept. */
export function logDestination(file: string | null): LogOptions['to'] {
  return pino.destination(file === null ? { dest: 2, sync: true } : { dest: file, sync: true, append: true });
}

/** A log for what happens now and then; nothing may be logged per reading or per command. */
export function openLog(options: LogOptions): Log {
  const { clock } = options;
  let windowUs = Number.NEGATIVE_INFINITY;
  let lines = 0;
  let left = 0;
  return pino(
    {
      level: options.level,
      base: null,
      hooks: {
        logMethod(args, method, level) {
          if (clock.nowUs() - windowUs >= US_PER_S) {
            windowUs = clock.nowUs();
            lines = 0;
            if (left > 0) method.apply(this, [{ left_out: left }, 'lines were left out: too many at once']);
            left = 0;
          }
          lines++;
          // The worst is never left out: a program writes one such line, and ends.
          if (lines <= LINES_PER_S || level >= FATAL) method.apply(this, args);
          else left++;
        },
      },
    },
    options.to,
  );
}

const FATAL: number = pino.levels.values['fatal' satisfies Level] ?? 60;
