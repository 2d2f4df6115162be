import { type ChildProcess, spawn } from 'node:child_process';
import { vi } from 'vitest';
import { noPty } from '../port/pty.ts';

/** A program at a real terminal: a pseudo-terminal whose screen and keyboard are the test. */
export interface Screen {
  /** Everything that was drawn, escapes and all. */
  shown(): string;
  type(text: string): void;
  /** The terminal goes away, with whatever runs in it. */
  close(): void;
}

/** @param script what its shell runs */
export function screen(script: string): Screen {
  if (noPty !== null) throw new Error(`the smoke test needs pseudo-terminals: ${noPty}`);
  const child: ChildProcess = spawn('socat', ['STDIO', `SYSTEM:${script},pty,setsid,ctty,stderr`], {
    stdio: ['pipe', 'pipe', 'ignore'],
    env: { ...process.env, TERM: 'xterm-256color', LANG: 'C.UTF-8' },
  });
  let shown = '';
  child.stdout?.on('data', (bytes: Buffer) => {
    shown += bytes.toString();
  });
  // It may be gone by the time that a test types something.
  child.stdin?.on('error', () => child.stdin?.destroy());
  return {
    shown: () => shown,
    type: (text) => void child.stdin?.write(text),
    close: () => void child.kill('SIGKILL'),
  };
}

/** How long a machine may take for what a program does at once. */
const LIMIT_MS = 90_000;

export const until = (condition: () => boolean): Promise<unknown> =>
  vi.waitUntil(condition, { interval: 20, timeout: LIMIT_MS });

/** Cursor motions, erasures and weights. */
const ESCAPES = /\x1b\[[\d;?]*[A-Za-z]/g;

/** What was drawn as lines of text; the last one is what stands where the cursor is. */
export function linesOf(shown: string): readonly string[] {
  return shown.split('\n').map((line) => {
    // Drawn anew in its place: only the last time counts.
    const drawn = line.replace(/\r+$/, '').split(/\r|\x1b\[1G/);
    return (drawn.at(-1) ?? '').replaceAll(ESCAPES, '');
  });
}
