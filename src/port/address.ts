import { nearest } from './nearest.ts';

/** Where a port is. `text` is the address as the rig writes it and identifies the port. */
export type Address =
  | { readonly kind: 'serial'; readonly text: string; readonly path: string; readonly baud: number | null }
  | { readonly kind: 'tcp'; readonly text: string; readonly host: string; readonly port: number }
  | {
      readonly kind: 'udp';
      readonly text: string;
      readonly host: string;
      readonly port: number;
      /** The port of this machine that the board sends to; null: the system picks one and the board answers to it. */
      readonly localPort: number | null;
    }
  | {
      readonly kind: 'sim';
      readonly text: string;
      readonly what: 'hand' | 'arm';
      readonly options: ReadonlyMap<string, string>;
    };

/** An address that cannot be used: what is wrong, and what would be right. */
export interface AddressMistake {
  readonly kind: 'mistake';
  readonly text: string;
  readonly wrong: string;
  readonly right: string;
}

type Trouble = Pick<AddressMistake, 'wrong' | 'right'>;
type Options = ReadonlyMap<string, string>;

/** What an option's value has to be; `test` is the whole rule, `right` says it. */
interface Rule {
  readonly test: (value: string) => boolean;
  readonly right: string;
}

const KINDS = ['serial', 'tcp', 'udp', 'sim'];

/** No UART or bridge chip goes faster; keeps a slip of the finger out. */
const BAUD_MAX = 20_000_000;

const baudRule: Rule = {
  test: (value) => isWhole(value, 1, BAUD_MAX),
  right: 'a positive whole number, such as 115200',
};
const portRule: Rule = { test: (value) => isWhole(value, 1, 65_535), right: 'a whole number from 1 to 65535' };
const seedRule: Rule = {
  test: (value) => isWhole(value, 0, Number.MAX_SAFE_INTEGER),
  right: 'a whole number from 0, such as 7',
};
const nameRule: Rule = { test: (value) => /^[\w-]+$/.test(value), right: 'letters, digits, _ and -, such as wren' };
const dropRule: Rule = {
  test: (value) => /^\d*\.?\d+$/.test(value) && Number(value) <= 1,
  right: 'the share of frames that get lost, from 0 to 1, such as 0.02',
};

const SERIAL_OPTIONS: Record<string, Rule> = { baud: baudRule };
const TCP_OPTIONS: Record<string, Rule> = {};
const UDP_OPTIONS: Record<string, Rule> = { local: portRule };
const SIM_OPTIONS: Record<'hand' | 'arm', Record<string, Rule>> = {
  hand: { seed: seedRule, name: nameRule },
  arm: { seed: seedRule, drop: dropRule, name: nameRule },
};

const EXAMPLES = 'serial:/dev/ttyACM0, serial:COM3, tcp:host:port, udp:host:port, sim:hand or sim:arm';

/**
 * Reads `serial:/dev/ttyACM0?baud=115200`, `serial:COM3`, `tcp:host:port`, `udp:host:port?local=port`,
 * `sim:hand?seed=7&name=left` and `sim:arm?seed=7&drop=0.02&name=wren`; an IPv6 host stands in brackets.
 */
export function parseAddress(text: string): Address | AddressMistake {
  const result = parse(text);
  return 'wrong' in result ? { kind: 'mistake', text, ...result } : result;
}

function parse(text: string): Address | Trouble {
  if (/\s/.test(text)) return { wrong: 'an address has no spaces', right: text.trim().replace(/\s+/g, '') || EXAMPLES };
  const colon = text.indexOf(':');
  const kind = text.slice(0, Math.max(colon, 0));
  if (!KINDS.includes(kind)) return unknownKind(text, kind);
  const mark = text.indexOf('?');
  const place = text.slice(colon + 1, mark < 0 ? text.length : mark);
  const query = mark < 0 ? null : text.slice(mark + 1);
  switch (kind) {
    case 'serial':
      return serial(text, place, query);
    case 'sim':
      return sim(text, place, query);
    default:
      return network(kind as 'tcp' | 'udp', text, place, query);
  }
}

function unknownKind(text: string, kind: string): Trouble {
  if (/^(\/dev\/|COM\d+$)/i.test(text)) return { wrong: 'the kind of port is missing', right: `serial:${text}` };
  const near = nearest(kind, KINDS);
  if (near !== null) return { wrong: `unknown kind of port "${kind}"`, right: near + text.slice(kind.length) };
  return { wrong: kind === '' ? 'the kind of port is missing' : `unknown kind of port "${kind}"`, right: EXAMPLES };
}

function serial(text: string, path: string, query: string | null): Address | Trouble {
  if (path === '')
    return { wrong: 'the path of the serial port is missing', right: 'serial:/dev/ttyACM0 or serial:COM3' };
  const options = parseOptions('serial', query, SERIAL_OPTIONS);
  if ('wrong' in options) return options;
  const baud = options.get('baud');
  return { kind: 'serial', text, path, baud: baud === undefined ? null : Number(baud) };
}

function network(kind: 'tcp' | 'udp', text: string, place: string, query: string | null): Address | Trouble {
  const right = `${kind}:host:port, such as ${kind}:192.168.1.40:7000`;
  if (place.startsWith('//')) return { wrong: 'an address has no slashes', right: `${kind}:${place.slice(2)}` };
  const parts = /^(?:\[([^[\]]+)\]|([^:[\]]+)):([^:]*)$/.exec(place);
  if (parts === null)
    return { wrong: place === '' ? 'the host is missing' : `"${place}" is not a host and a port`, right };
  const [, bracketed, plain, port = ''] = parts;
  if (!portRule.test(port)) return { wrong: `the port is "${port}"`, right: portRule.right };
  const options = parseOptions(kind, query, kind === 'tcp' ? TCP_OPTIONS : UDP_OPTIONS);
  if ('wrong' in options) return options;
  const where = { text, host: bracketed ?? plain ?? '', port: Number(port) };
  if (kind === 'tcp') return { kind, ...where };
  const local = options.get('local');
  return { kind, ...where, localPort: local === undefined ? null : Number(local) };
}

function sim(text: string, what: string, query: string | null): Address | Trouble {
  if (what !== 'hand' && what !== 'arm') {
    const near = nearest(what, ['hand', 'arm']);
    return {
      wrong: what === '' ? 'what to simulate is missing' : `nothing called "${what}" is simulated`,
      right: near === null ? 'sim:hand or sim:arm' : `sim:${near}`,
    };
  }
  const options = parseOptions(`sim:${what}`, query, SIM_OPTIONS[what]);
  return 'wrong' in options ? options : { kind: 'sim', text, what, options };
}

function parseOptions(of: string, query: string | null, rules: Record<string, Rule>): Options | Trouble {
  const options = new Map<string, string>();
  const known = Object.keys(rules);
  for (const pair of query === null ? [] : query.split('&')) {
    const equals = pair.indexOf('=');
    const key = equals < 0 ? pair : pair.slice(0, equals);
    const value = equals < 0 ? '' : pair.slice(equals + 1);
    const rule = Object.hasOwn(rules, key) ? rules[key] : undefined;
    if (rule === undefined) return unknownOption(of, key, known);
    if (options.has(key)) return { wrong: `${key} is given twice`, right: `one ${key}=` };
    if (!rule.test(value)) return { wrong: `${key} is "${value}"`, right: rule.right };
    options.set(key, value);
  }
  return options;
}

function unknownOption(of: string, key: string, known: readonly string[]): Trouble {
  const wrong = key === '' ? 'an option is empty' : `unknown option "${key}"`;
  if (known.length === 0) return { wrong, right: `${of} takes no options` };
  const near = nearest(key, known);
  return { wrong, right: near === null ? `${of} takes ${known.join(', ')}` : `${near}=` };
}

function isWhole(text: string, min: number, max: number): boolean {
  const value = Number(text);
  return /^\d+$/.test(text) && value >= min && value <= max;
}
