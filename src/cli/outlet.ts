import { write } from 'node:fs';
import type { Writable } from 'node:stream';
import { type Cancel, type Clock, US_PER_MS } from '../clock/clock.ts';

/**
 * A way out for text that never makes the program wait. A reader that stops reading (a paused pager, a hung remote shell)
 * would otherwise stop the arms' clock with it, because Node writes to pipes and terminals synchronously.
 */
export interface Outlet {
  /** Text that matters. When too much waits, the oldest goes, whole. */
  write(text: string): void;
  /** Text that is stale a moment later: taken only when nothing waits. */
  offer(text: string): boolean;
  /** Resolves when all has left or cannot, or after `limitUs`. */
  flush(limitUs: number): Promise<void>;
}

/** Starts one write; `done` says how many bytes have left. */
export type Send = (bytes: Uint8Array, done: (fault: NodeJS.ErrnoException | null, written: number) => void) => void;

const WAITING_CHARACTERS_MAX = 256 * 1024;
/** A descriptor that somebody else has made non-blocking is full: try again after this. */
const FULL_US = 10 * US_PER_MS;

/** @param onClosed told once, when nobody can read any more; whatever follows is thrown away */
export function outlet(clock: Clock, send: Send, onClosed: (fault: NodeJS.ErrnoException) => void): Outlet {
  const waiting: string[] = [];
  let characters = 0;
  let leaving: Uint8Array | null = null;
  let closed = false;
  let emptied: (() => void) | null = null;
  let cancelLimit: Cancel = () => {};

  const next = (): void => {
    if (leaving !== null) return;
    const text = waiting.shift();
    if (text === undefined) {
      emptied?.();
      return;
    }
    characters -= text.length;
    leaving = new TextEncoder().encode(text);
    attempt();
  };

  const attempt = (): void => {
    const bytes = leaving as Uint8Array;
    send(bytes, (fault, written) => {
      if (fault?.code === 'EAGAIN') {
        clock.at(clock.nowUs() + FULL_US, attempt);
        return;
      }
      if (fault !== null) {
        close(fault);
        return;
      }
      leaving = written < bytes.length ? bytes.subarray(written) : null;
      if (leaving === null) next();
      else attempt();
    });
  };

  const close = (fault: NodeJS.ErrnoException): void => {
    closed = true;
    leaving = null;
    waiting.length = 0;
    emptied?.();
    onClosed(fault);
  };

  const put = (text: string): void => {
    waiting.push(text);
    characters += text.length;
    while (characters > WAITING_CHARACTERS_MAX && waiting.length > 1) characters -= (waiting.shift() as string).length;
    next();
  };

  return {
    write(text) {
      if (!closed && text !== '') put(text);
    },
    offer(text) {
      if (closed || leaving !== null || text === '') return false;
      put(text);
      return true;
    },
    flush(limitUs) {
      if (closed || leaving === null) return Promise.resolve();
      return new Promise((resolve) => {
        emptied = () => {
          emptied = null;
          cancelLimit();
          resolve();
        };
        cancelLimit = clock.at(clock.nowUs() + limitUs, emptied);
      });
    },
  };
}

/** Writes to a descriptor on a thread of its own. */
export function toDescriptor(descriptor: number): Send {
  return (bytes, done) => write(descriptor, bytes, 0, bytes.length, null, done);
}

/** Writes to a stream, where descriptors do not take text as it is: Windows' console. */
export function toStream(stream: Writable): Send {
  return (bytes, done) => stream.write(bytes, (fault) => done(fault ?? null, bytes.length));
}
