import { once } from 'node:events';
import { type AddressInfo, createServer, type Server, type Socket } from 'node:net';
import { realClock } from '../../src/clock/clock.ts';
import { tcpPort } from '../../src/port/tcp.ts';
import { type Bench, portContract } from './contract.ts';
import { heldByTheProcess, turnsOfTheLoop, untilReally } from './real-time.ts';

async function tcpBench(): Promise<Bench> {
  const received: Buffer[] = [];
  let peers: Socket[] = [];
  let server: Server;
  const listen = async (port: number): Promise<number> => {
    server = createServer((socket) => {
      peers.push(socket);
      socket.on('data', (bytes) => received.push(bytes));
      socket.on('error', () => socket.destroy());
    });
    server.listen(port, '127.0.0.1');
    await once(server, 'listening');
    return (server.address() as AddressInfo).port;
  };
  const vanish = async (): Promise<void> => {
    if (!server.listening) return;
    const isClosed = once(server, 'close');
    server.close();
    for (const peer of peers) peer.destroy();
    peers = [];
    await isClosed;
  };
  const number = await listen(0);
  const text = `tcp:127.0.0.1:${number}`;
  return {
    port: tcpPort({ kind: 'tcp', text, host: '127.0.0.1', port: number }, realClock()),
    received: () => Buffer.concat(received),
    send: (bytes) => void peers.at(-1)?.write(bytes),
    vanish,
    comeBack: async () => void (await listen(number)),
    until: untilReally,
    settle: turnsOfTheLoop,
    dispose: vanish,
    held: heldByTheProcess,
  };
}

portContract({
  name: 'tcp',
  make: tcpBench,
  lossCode: 'PORT_CLOSED',
  absenceCode: 'PORT_REFUSED',
  noticesByWriting: false,
  missing: null,
});
