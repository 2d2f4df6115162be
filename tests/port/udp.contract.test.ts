import { createSocket, type RemoteInfo, type Socket } from 'node:dgram';
import { once } from 'node:events';
import { realClock } from '../../src/clock/clock.ts';
import { udpPort } from '../../src/port/udp.ts';
import { type Bench, portContract } from './contract.ts';
import { heldByTheProcess, turnsOfTheLoop, untilReally } from './real-time.ts';

async function udpBench(): Promise<Bench> {
  const received: Buffer[] = [];
  let peer: RemoteInfo | null = null;
  let far: Socket | null = null;
  const listen = async (port: number): Promise<number> => {
    const socket = createSocket('udp4');
    socket.on('message', (bytes, from) => {
      peer = from;
      received.push(bytes);
    });
    socket.bind(port, '127.0.0.1');
    await once(socket, 'listening');
    far = socket;
    return socket.address().port;
  };
  const vanish = async (): Promise<void> => {
    const leaving = far;
    far = null;
    if (leaving === null) return;
    const isClosed = once(leaving, 'close');
    leaving.close();
    await isClosed;
  };
  const number = await listen(0);
  const text = `udp:127.0.0.1:${number}`;
  return {
    port: udpPort({ kind: 'udp', text, host: '127.0.0.1', port: number, localPort: null }, realClock()),
    received: () => Buffer.concat(received),
    send: (bytes) => far?.send(bytes, peer?.port ?? 0, '127.0.0.1'),
    vanish,
    comeBack: async () => void (await listen(number)),
    until: untilReally,
    settle: turnsOfTheLoop,
    dispose: vanish,
    held: heldByTheProcess,
  };
}

portContract({
  name: 'udp',
  make: udpBench,
  lossCode: 'PORT_REFUSED',
  absenceCode: null,
  noticesByWriting: true,
  missing: null,
});
