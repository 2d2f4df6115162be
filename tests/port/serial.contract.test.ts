import { realClock } from '../../src/clock/clock.ts';
import { serialPort } from '../../src/port/serial.ts';
import { type Bench, portContract } from './contract.ts';
import { noPty, pluggedPty } from './pty.ts';
import { heldByTheProcess, turnsOfTheLoop, untilReally } from './real-time.ts';

async function serialBench(): Promise<Bench> {
  const { path, received, child, plug, unplug, dispose } = await pluggedPty();
  return {
    port: serialPort({ kind: 'serial', text: `serial:${path}`, path, baud: 115_200 }, realClock()),
    received,
    send: (bytes) => void child()?.stdin?.write(bytes),
    vanish: unplug,
    comeBack: plug,
    until: untilReally,
    settle: turnsOfTheLoop,
    dispose,
    held: heldByTheProcess,
  };
}

portContract({
  name: 'serial',
  make: serialBench,
  lossCode: 'PORT_CLOSED',
  absenceCode: 'PORT_MISSING',
  noticesByWriting: false,
  missing: noPty,
});
