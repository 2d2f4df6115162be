import { createSocket } from 'node:dgram';
import { isIPv6 } from 'node:net';
import type { Clock } from '../clock/clock.ts';
import type { Address } from './address.ts';
import { detailOf, socketFault } from './faults.ts';
import { type Connection, type ConnectionHandlers, reopening, type ReopeningOptions } from './reopening.ts';
import type { Port } from './types.ts';

type UdpAddress = Extract<Address, { kind: 'udp' }>;

/** How much the system may hold for us; beyond it drops datagrams, which is better than handing over old ones. */
const RECEIVE_BYTES_MAX = 65_536;

/** Losing one datagram is part of the bargain; these say that one was lost, not that the peer is. */
const LOST_DATAGRAM = new Set(['ENOBUFS', 'EAGAIN', 'EMSGSIZE']);

/**
 * Datagrams to and from one peer. There is no connection to make, so the port opens at once; a peer that is not there
 * shows itself, if at all, when a datagram comes back as undeliverable.
 */
export function udpPort(address: UdpAddress, clock: Clock, options: ReopeningOptions = {}): Port {
  return reopening(clock, address.text, (handlers) => connectUdp(address, handlers), options);
}

function connectUdp({ host, port, localPort }: UdpAddress, handlers: ConnectionHandlers): Connection {
  const socket = createSocket({ type: isIPv6(host) ? 'udp6' : 'udp4', recvBufferSize: RECEIVE_BYTES_MAX });
  const failed = (error: Error): void => handlers.failed(socketFault(error), detailOf(error));
  const sent = (error: Error | null): void => {
    if (error === null || LOST_DATAGRAM.has((error as NodeJS.ErrnoException).code ?? '')) handlers.sent();
    else failed(error);
  };
  let isOpen = true;
  socket.on('error', failed);
  socket.on('connect', () => handlers.opened());
  socket.on('message', (bytes) => handlers.data(bytes));
  socket.bind({ port: localPort ?? 0, exclusive: true }, () => {
    // A connected socket takes datagrams from its peer only, and skips a look-up and a route for each one it sends.
    if (isOpen) socket.connect(port, host, (error?: Error) => error && failed(error));
  });
  return {
    write(bytes) {
      socket.send(bytes, sent);
      return 0;
    },
    end(_gently, ended) {
      isOpen = false;
      socket.close(ended);
    },
  };
}
