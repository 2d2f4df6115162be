import { type ChildProcess, spawn, spawnSync } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { untilReally } from './real-time.ts';

/** Why pseudo-terminals cannot be had here, or null. */
export const noPty: string | null =
  process.platform !== 'win32' && spawnSync('socat', ['-V']).status === 0 ? null : 'socat is not installed here';

/** A pseudo-terminal whose other side is a process that can be killed, like a cable that can be pulled. */
export interface Pty {
  readonly path: string;
  received(): Buffer;
  /** The process on the other side, while it is plugged in. */
  child(): ChildProcess | null;
  plug(): Promise<void>;
  unplug(): Promise<void>;
  dispose(): Promise<void>;
}

/** @param far socat's address of the other side; standard input and output unless said. */
export async function pluggedPty(far = 'STDIO'): Promise<Pty> {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-port-'));
  const path = join(folder, 'tty');
  const received: Buffer[] = [];
  let socat: ChildProcess | null = null;
  const pty: Pty = {
    path,
    received: () => Buffer.concat(received),
    child: () => socat,
    async plug() {
      const child = spawn('socat', ['-b', '65536', `PTY,raw,echo=0,link=${path}`, far], {
        stdio: ['pipe', 'pipe', 'ignore'],
      });
      child.stdout.on('data', (bytes: Buffer) => received.push(bytes));
      // It may be gone by the time that a test has it send something.
      child.stdin.on('error', () => child.stdin.destroy());
      socat = child;
      await untilReally('a pseudo-terminal', () => existsSync(path));
    },
    async unplug() {
      const child = socat;
      socat = null;
      if (child === null) return;
      if (child.exitCode === null && child.signalCode === null) {
        const isGone = once(child, 'exit');
        child.kill('SIGKILL');
        await isGone;
      }
      // Killed, it leaves its link behind; a device's name goes with the device.
      rmSync(path, { force: true });
    },
    async dispose() {
      await pty.unplug();
      rmSync(folder, { recursive: true, force: true });
    },
  };
  await pty.plug();
  return pty;
}
