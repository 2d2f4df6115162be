import { type ChildProcess, spawn } from 'node:child_process';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { noPty } from '../port/pty.ts';

/** The live view at a real terminal: a pseudo-terminal whose screen and keyboard are this test. */
const LIMIT_MS = 90_000;
const DEMO = `${process.execPath} --import tsx src/cli/main.ts demo`;
/** Another screen taken, and given back with its cursor and its wrapping. */
const TAKEN = '\x1b[?1049h';
const GIVEN_BACK = '\x1b[?2004l\x1b[?7h\x1b[?25h\x1b[?1049l';

let socat: ChildProcess | null = null;

afterEach(() => {
  socat?.kill('SIGKILL');
});

function terminal(script: string): { shown(): string; type(text: string): void; hangUp(): void } {
  if (noPty !== null) throw new Error(`the smoke test needs pseudo-terminals: ${noPty}`);
  const child = spawn('socat', ['STDIO', `SYSTEM:${script},pty,setsid,ctty,stderr`], {
    stdio: ['pipe', 'pipe', 'ignore'],
    env: { ...process.env, TERM: 'xterm-256color', LANG: 'C.UTF-8', NO_COLOR: '1' },
  });
  socat = child;
  let shown = '';
  // Weights are switched between a name and its state.
  child.stdout.on('data', (bytes: Buffer) => {
    shown += bytes.toString().replaceAll(/\x1b\[[\d;]+m/g, '');
  });
  return {
    shown: () => shown,
    type: (text) => void child.stdin.write(text),
    hangUp: () => void child.kill('SIGKILL'),
  };
}

const until = (condition: () => boolean): Promise<unknown> =>
  vi.waitUntil(condition, { interval: 20, timeout: LIMIT_MS });

function lives(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch {
    return false;
  }
}

describe('eidograph demo at a terminal', () => {
  it('shows three arms following, obeys keys, and gives the terminal back with status 0', async () => {
    const at = terminal(`${DEMO}; echo status $?`);
    await until(() => /wren +► following/.test(at.shown()) && /heron +► following/.test(at.shown()));
    expect(at.shown()).toContain(TAKEN);
    at.type('2h');
    await until(() => /heron ‖ holding/.test(at.shown()));
    at.type('q');
    await until(() => at.shown().includes('status '));
    expect(at.shown()).toContain('status 0');
    expect(at.shown()).toContain(GIVEN_BACK);
    expect(at.shown().slice(at.shown().indexOf(GIVEN_BACK))).toContain('lantern-yard: left by the operator');
  });

  it('ends when the terminal goes away', async () => {
    const at = terminal(`echo pid $$; exec ${DEMO}`);
    await until(() => /wren +► following/.test(at.shown()));
    const pid = Number(/pid (\d+)/.exec(at.shown())?.[1]);
    expect(lives(pid)).toBe(true);
    at.hangUp();
    await until(() => !lives(pid));
  });
});
