import type { Clock } from '../clock/clock.ts';
import type { Address } from './address.ts';
import { serialPort } from './serial.ts';
import { tcpPort } from './tcp.ts';
import type { Port } from './types.ts';
import { udpPort } from './udp.ts';

/**
 * The port at an address of this world; simulated ones have their far end in the program and are opened where that is.
 * @param baudDefault for a serial address that names no baud rate: what its wire usually runs at.
 */
export function openPort(address: Exclude<Address, { kind: 'sim' }>, clock: Clock, baudDefault: number): Port {
  switch (address.kind) {
    case 'serial':
      return serialPort(address, clock, { baudDefault });
    case 'tcp':
      return tcpPort(address, clock);
    case 'udp':
      return udpPort(address, clock);
  }
}
