import { writeSync } from 'node:fs';
import type { ReadStream, WriteStream } from 'node:tty';
import type { Outlet } from './outlet.ts';
import type { Size } from './view/scene.ts';

/** A terminal that the live view has for itself, and gives back as it was. */
export interface Terminal {
  size(): Size;
  /** Takes the screen and the keyboard. */
  open(hear: TerminalListener): void;
  /** Shows a whole picture, unless the last one is still on its way. */
  draw(lines: readonly string[]): void;
  bell(): void;
  /** Gives screen and keyboard back; harmless when it has none. */
  close(): void;
}

export interface TerminalListener {
  keys(text: string): void;
  resized(): void;
  /** Nobody sits there any more. */
  gone(): void;
}

/**
 * The sequences used, all in general use (ECMA-48 and xterm's control sequences): another screen, no cursor, no wrapping at
 * the right edge, pasted text marked as such.
 */
const TAKE = '\x1b[?1049h\x1b[?25l\x1b[?7l\x1b[?2004h';
const GIVE_BACK = '\x1b[0m\x1b[?2004l\x1b[?7h\x1b[?25h\x1b[?1049l';
const HOME = '\x1b[H';
const CLEAR_LINE = '\x1b[K';
const CLEAR_BELOW = '\x1b[J';
/** The terminal shows what stands between in one go; one that does not know the pair ignores it. */
const TOGETHER = '\x1b[?2026h';
const TOGETHER_END = '\x1b[?2026l';
const BELL = '\x07';

const SIZE_DEFAULT: Size = { columns: 80, rows: 24 };

/**
 * @param descriptor of `output`
 * @param out the way to the same terminal as `output`
 */
export function terminal(input: ReadStream, output: WriteStream, descriptor: number, out: Outlet): Terminal {
  let listener: TerminalListener | null = null;
  let drawn = '';

  const onKeys = (text: string): void => listener?.keys(text);
  const onResize = (): void => {
    drawn = '';
    listener?.resized();
  };
  const onGone = (): void => listener?.gone();

  const close = (): void => {
    if (listener === null) return;
    listener = null;
    process.off('exit', close);
    process.off('uncaughtExceptionMonitor', close);
    input.off('data', onKeys);
    input.off('end', onGone);
    output.off('resize', onResize);
    try {
      input.setRawMode(false);
      input.pause();
      // At once and before anything else is printed, whatever the program goes on to do.
      writeSync(descriptor, GIVE_BACK);
    } catch {
      // The terminal is gone, and with it what had to be put in order.
    }
  };

  return {
    size: () => ({ columns: output.columns || SIZE_DEFAULT.columns, rows: output.rows || SIZE_DEFAULT.rows }),
    open(hear) {
      listener = hear;
      process.on('exit', close);
      // Before the trace of a crash is printed, or it would vanish with the screen.
      process.on('uncaughtExceptionMonitor', close);
      input.setEncoding('utf8');
      input.setRawMode(true);
      input.on('data', onKeys);
      input.on('end', onGone);
      input.on('error', onGone);
      output.on('resize', onResize);
      input.resume();
      out.write(TAKE);
    },
    draw(lines) {
      // Cleared before it is written: afterwards the sequence would eat the last column of a full line.
      const picture = lines.map((line) => CLEAR_LINE + line).join('\r\n');
      if (picture === drawn) return;
      if (out.offer(`${TOGETHER}${HOME}${picture}${CLEAR_BELOW}${TOGETHER_END}`)) drawn = picture;
    },
    bell: () => out.write(BELL),
    close,
  };
}
