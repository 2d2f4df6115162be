import { connect as connectSocket } from 'node:net';
import type { Clock } from '../clock/clock.ts';
import type { Address } from './address.ts';
import { detailOf, socketFault } from './faults.ts';
import { type Connection, type ConnectionHandlers, reopening, type ReopeningOptions } from './reopening.ts';
import type { Port } from './types.ts';

type TcpAddress = Extract<Address, { kind: 'tcp' }>;

/** First probe after this much silence: a peer that lost its power or its cable says nothing, and would look open for ever. */
const PROBE_MS = 1_000;

/** A TCP connection to a board or a serial server, as a client. */
export function tcpPort(address: TcpAddress, clock: Clock, options: ReopeningOptions = {}): Port {
  return reopening(clock, address.text, (handlers) => connectTcp(address, handlers), options);
}

function connectTcp({ host, port }: TcpAddress, handlers: ConnectionHandlers): Connection {
  // Without Nagle's algorithm a small frame does not wait for the acknowledgement of the one before.
  const socket = connectSocket({ host, port, noDelay: true, keepAlive: true, keepAliveInitialDelay: PROBE_MS });
  let isOpen = false;
  const sent = (error?: Error | null): void => {
    if (!error) handlers.sent();
  };
  socket.on('connect', () => {
    isOpen = true;
    handlers.opened();
  });
  socket.on('data', handlers.data);
  socket.on('end', () => handlers.failed('PORT_CLOSED', 'the peer closed the connection'));
  socket.on('error', (error) => {
    const code = socketFault(error);
    // What means "no answer" while connecting means "gone" afterwards.
    handlers.failed(isOpen && code === 'PORT_REFUSED' ? 'PORT_CLOSED' : code, detailOf(error));
  });
  socket.on('close', () => handlers.failed('PORT_CLOSED', 'the connection is closed'));
  return {
    write(bytes) {
      socket.write(bytes, sent);
      return 0;
    },
    end(gently, ended) {
      if (socket.closed) return ended();
      socket.once('close', () => ended());
      if (gently) socket.end(() => socket.destroy());
      // What the system still holds would arrive as stale commands: a reset throws it away.
      else if (isOpen) socket.resetAndDestroy();
      else socket.destroy();
    },
  };
}
