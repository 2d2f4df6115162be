import { type ChildProcess, spawn, spawnSync } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { it } from 'vitest';
import { realClock } from '../../src/clock/clock.ts';
import { serialPort } from '../../src/port/serial.ts';
import { type Bench, portContract } from './contract.ts';
import { heldByTheProcess, turnsOfTheLoop, untilReally } from './real-time.ts';

/** A pseudo-terminal whose other side is the standard input and output of a process that can be killed. */
async function serialBench(): Promise<Bench> {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-port-'));
  const path = join(folder, 'tty');
  const received: Buffer[] = [];
  let socat: ChildProcess | null = null;
  const plug = async (): Promise<void> => {
    const child = spawn('socat', ['-b', '65536', `PTY,raw,echo=0,link=${path}`, 'STDIO'], {
      stdio: ['pipe', 'pipe', 'ignore'],
    });
    child.stdout.on('data', (bytes: Buffer) => received.push(bytes));
    // It may be gone by the time that a test has it send something.
    child.stdin.on('error', () => child.stdin.destroy());
    socat = child;
    await untilReally('a pseudo-terminal', () => existsSync(path));
  };
  const unplug = async (): Promise<void> => {
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
  };
  await plug();
  return {
    port: serialPort({ kind: 'serial', text: `serial:${path}`, path, baud: 115_200 }, realClock()),
    received: () => Buffer.concat(received),
    send: (bytes) => void socat?.stdin?.write(bytes),
    vanish: unplug,
    comeBack: plug,
    until: untilReally,
    settle: turnsOfTheLoop,
    async dispose() {
      await unplug();
      rmSync(folder, { recursive: true, force: true });
    },
    held: heldByTheProcess,
  };
}

if (process.platform === 'win32' || spawnSync('socat', ['-V']).status !== 0) {
  it.skip('a serial port: needs socat, which is not installed here', () => {});
} else {
  portContract({
    name: 'serial',
    make: serialBench,
    lossCode: 'PORT_CLOSED',
    absenceCode: 'PORT_MISSING',
    noticesByWriting: false,
  });
}
