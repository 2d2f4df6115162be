import { normalize } from 'node:path';
import { parseAddress } from '../port/address.ts';
import type { Address } from '../port/address.ts';
import { WIRE_ABILITIES } from '../wire/abilities.ts';
import type { WireChoice } from '../wire/choice.ts';

/** Which profiles share a port: lists of their indices, in order of first mention. Malformed ports are left out. */
export function groupByPort(ports: readonly (string | undefined)[]): readonly (readonly number[])[] {
  const groups = new Map<string, number[]>();
  for (const [i, port] of ports.entries()) {
    const address = addressOf(port);
    if (address === null) continue;
    const identity = identityOf(address);
    const group = groups.get(identity);
    if (group === undefined) groups.set(identity, [i]);
    else group.push(i);
  }
  return [...groups.values()];
}

/** The address that a file writes; null where it is missing or malformed. */
export function addressOf(port: string | undefined): Address | null {
  const address = port === undefined ? null : parseAddress(port);
  return address === null || address.kind === 'mistake' ? null : address;
}

/**
 * Two spellings of one device are one port: it can be opened once. Options do not make another: two baud rates on one
 * device are a contradiction, not two devices.
 */
function identityOf(address: Address): string {
  switch (address.kind) {
    case 'serial':
      return `serial:${normalize(address.path)}`;
    case 'tcp':
    case 'udp':
      return `${address.kind}:${address.host.toLowerCase()}:${address.port}`;
    case 'sim':
      return address.text;
  }
}

/** Bits a second on the port, ten to a byte (8N1: start, eight data bits, stop); null where the address has no line. */
export function baudOf(address: Address, wire: WireChoice['name']): number | null {
  return address.kind === 'serial' ? (address.baud ?? WIRE_ABILITIES[wire].baudDefault) : null;
}

export const BITS_PER_BYTE = 10;
