import { closeSync, openSync, readFileSync } from 'node:fs';
import { PassThrough } from 'node:stream';
import type { ReadStream, WriteStream } from 'node:tty';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Outlet } from '../../src/cli/outlet.ts';
import { type Terminal, terminal } from '../../src/cli/terminal.ts';
import { scratch } from './rigs.ts';

/** A terminal made of plain streams, and a file in place of what is written past them. */
class Keyboard extends PassThrough {
  raw = false;
  setRawMode(raw: boolean): this {
    this.raw = raw;
    return this;
  }
}
class Screen extends PassThrough {
  columns: number | undefined = 100;
  rows: number | undefined = 40;
}

let files: ReturnType<typeof scratch>;
let descriptor: number;
let keyboard: Keyboard;
let screen: Screen;
let written: string[];
let isFree: boolean;
let at: Terminal;
let heard: { keys: string; resized: number; gone: number };

beforeEach(() => {
  files = scratch();
  descriptor = openSync(files.path('tty'), 'w');
  keyboard = new Keyboard();
  screen = new Screen();
  written = [];
  isFree = true;
  const out: Outlet = {
    write: (text) => void written.push(text),
    offer(text) {
      if (isFree) written.push(text);
      return isFree;
    },
    flush: () => Promise.resolve(),
  };
  at = terminal(keyboard as unknown as ReadStream, screen as unknown as WriteStream, descriptor, out);
  heard = { keys: '', resized: 0, gone: 0 };
  at.open({
    keys: (text) => void (heard.keys += text),
    resized: () => void heard.resized++,
    gone: () => void heard.gone++,
  });
});

afterEach(() => {
  at.close();
  closeSync(descriptor);
  files.remove();
});

const pastTheStreams = (): string => readFileSync(files.path('tty'), 'latin1');

describe('A terminal', () => {
  it('is taken: another screen, no cursor, no wrapping, keys one by one', () => {
    expect(written.join('')).toBe('\x1b[?1049h\x1b[?25l\x1b[?7l\x1b[?2004h');
    expect(keyboard.raw).toBe(true);
  });

  it('is given back as it was, once', () => {
    at.close();
    at.close();
    expect(pastTheStreams()).toBe('\x1b[0m\x1b[?2004l\x1b[?7h\x1b[?25h\x1b[?1049l');
    expect(keyboard.raw).toBe(false);
  });

  it('is given back however the program ends, a crash included', () => {
    const before = process.listenerCount('uncaughtExceptionMonitor');
    process.listeners('uncaughtExceptionMonitor').at(-1)?.(new Error('planted'), 'uncaughtException');
    expect(pastTheStreams()).toContain('\x1b[?1049l');
    expect(process.listenerCount('uncaughtExceptionMonitor')).toBe(before - 1);
  });

  it('is given back when the process exits', () => {
    process.listeners('exit').at(-1)?.(0);
    expect(pastTheStreams()).toContain('\x1b[?1049l');
  });

  it('clears each line before it is written: afterwards a full line would lose its last column', () => {
    at.draw(['one', 'two']);
    expect(written.at(-1)).toBe('\x1b[?2026h\x1b[H\x1b[Kone\r\n\x1b[Ktwo\x1b[J\x1b[?2026l');
  });

  it('is not drawn when nothing has changed, nor while a picture is on its way', () => {
    at.draw(['one']);
    at.draw(['one']);
    expect(written).toHaveLength(2);
    isFree = false;
    at.draw(['two']);
    isFree = true;
    at.draw(['two']);
    expect(written).toHaveLength(3);
  });

  it('is drawn whole again after a change of size', () => {
    at.draw(['one']);
    screen.emit('resize');
    expect(heard.resized).toBe(1);
    at.draw(['one']);
    expect(written).toHaveLength(3);
  });

  it('passes on keys, and that nobody sits there any more', () => {
    keyboard.emit('data', 'h');
    keyboard.emit('end');
    keyboard.emit('error', new Error('EIO'));
    expect(heard).toEqual({ keys: 'h', resized: 0, gone: 2 });
  });

  it('does not fall over a hang-up after it was given back', () => {
    at.close();
    expect(() => keyboard.emit('error', new Error('EIO'))).not.toThrow();
    expect(heard.gone).toBe(0);
  });

  it('rings', () => {
    at.bell();
    expect(written.at(-1)).toBe('\x07');
  });

  it('has the usual size where it tells none', () => {
    expect(at.size()).toEqual({ columns: 100, rows: 40 });
    screen.columns = 0;
    screen.rows = undefined;
    expect(at.size()).toEqual({ columns: 80, rows: 24 });
  });
});
