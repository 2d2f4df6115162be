import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseAddress } from '../../src/port/address.ts';

describe('an address', () => {
  it.each([
    ['serial:/dev/ttyACM0', { kind: 'serial', path: '/dev/ttyACM0', baud: null }],
    [
      'serial:/dev/serial/by-id/usb-A_b-if00?baud=57600',
      { kind: 'serial', path: '/dev/serial/by-id/usb-A_b-if00', baud: 57_600 },
    ],
    ['serial:COM3', { kind: 'serial', path: 'COM3', baud: null }],
    ['serial:\\\\.\\COM10?baud=9600', { kind: 'serial', path: '\\\\.\\COM10', baud: 9_600 }],
    ['tcp:192.168.1.40:7000', { kind: 'tcp', host: '192.168.1.40', port: 7_000 }],
    ['tcp:wren.local:1', { kind: 'tcp', host: 'wren.local', port: 1 }],
    ['tcp:[fe80::1]:65535', { kind: 'tcp', host: 'fe80::1', port: 65_535 }],
    ['udp:wren.local:9000', { kind: 'udp', host: 'wren.local', port: 9_000, localPort: null }],
    ['udp:wren.local:9000?local=9001', { kind: 'udp', host: 'wren.local', port: 9_000, localPort: 9_001 }],
    ['sim:hand', { kind: 'sim', what: 'hand', options: new Map() }],
    [
      'sim:hand?seed=7&name=left',
      {
        kind: 'sim',
        what: 'hand',
        options: new Map([
          ['seed', '7'],
          ['name', 'left'],
        ]),
      },
    ],
    [
      'sim:arm?name=wren&drop=0.02',
      {
        kind: 'sim',
        what: 'arm',
        options: new Map([
          ['name', 'wren'],
          ['drop', '0.02'],
        ]),
      },
    ],
  ])('%s is read whole and keeps its text', (text, address) => {
    expect(parseAddress(text)).toEqual({ ...address, text });
  });

  it.each([
    [
      '',
      'the kind of port is missing',
      'serial:/dev/ttyACM0, serial:COM3, tcp:host:port, udp:host:port, sim:hand or sim:arm',
    ],
    ['/dev/ttyACM0', 'the kind of port is missing', 'serial:/dev/ttyACM0'],
    ['COM3', 'the kind of port is missing', 'serial:COM3'],
    ['serail:/dev/ttyACM0', 'unknown kind of port "serail"', 'serial:/dev/ttyACM0'],
    [
      'http:a:1',
      'unknown kind of port "http"',
      'serial:/dev/ttyACM0, serial:COM3, tcp:host:port, udp:host:port, sim:hand or sim:arm',
    ],
    ['serial: /dev/ttyACM0', 'an address has no spaces', 'serial:/dev/ttyACM0'],
    ['serial:', 'the path of the serial port is missing', 'serial:/dev/ttyACM0 or serial:COM3'],
    ['serial:?baud=9600', 'the path of the serial port is missing', 'serial:/dev/ttyACM0 or serial:COM3'],
    ['serial:COM3?baud=fast', 'baud is "fast"', 'a positive whole number, such as 115200'],
    ['serial:COM3?baud=0', 'baud is "0"', 'a positive whole number, such as 115200'],
    ['serial:COM3?baud=9600.5', 'baud is "9600.5"', 'a positive whole number, such as 115200'],
    ['serial:COM3?baud=-9600', 'baud is "-9600"', 'a positive whole number, such as 115200'],
    ['serial:COM3?baud=999999999999', 'baud is "999999999999"', 'a positive whole number, such as 115200'],
    ['serial:COM3?baud', 'baud is ""', 'a positive whole number, such as 115200'],
    ['serial:COM3?buad=9600', 'unknown option "buad"', 'baud='],
    ['serial:COM3?parity=odd', 'unknown option "parity"', 'serial takes baud'],
    ['serial:COM3?baud=1&baud=2', 'baud is given twice', 'one baud='],
    ['serial:COM3?', 'an option is empty', 'serial takes baud'],
    ['serial:COM3?constructor=1', 'unknown option "constructor"', 'serial takes baud'],
    ['tcp:', 'the host is missing', 'tcp:host:port, such as tcp:192.168.1.40:7000'],
    ['tcp:wren.local', '"wren.local" is not a host and a port', 'tcp:host:port, such as tcp:192.168.1.40:7000'],
    ['tcp://wren.local:7000', 'an address has no slashes', 'tcp:wren.local:7000'],
    ['tcp:wren.local:0', 'the port is "0"', 'a whole number from 1 to 65535'],
    ['udp:wren.local:65536', 'the port is "65536"', 'a whole number from 1 to 65535'],
    ['udp:wren.local:osc', 'the port is "osc"', 'a whole number from 1 to 65535'],
    ['tcp:fe80::1:7000', '"fe80::1:7000" is not a host and a port', 'tcp:host:port, such as tcp:192.168.1.40:7000'],
    ['tcp:wren.local:7000?baud=9600', 'unknown option "baud"', 'tcp takes no options'],
    ['udp:wren.local:7000?local=none', 'local is "none"', 'a whole number from 1 to 65535'],
    ['sim:', 'what to simulate is missing', 'sim:hand or sim:arm'],
    ['sim:hnad', 'nothing called "hnad" is simulated', 'sim:hand'],
    ['sim:stork', 'nothing called "stork" is simulated', 'sim:hand or sim:arm'],
    ['sim:hand?sed=7', 'unknown option "sed"', 'seed='],
    ['sim:hand?drop=0.1', 'unknown option "drop"', 'sim:hand takes seed, name'],
    ['sim:arm?drop=2', 'drop is "2"', 'the share of frames that get lost, from 0 to 1, such as 0.02'],
    ['sim:arm?drop=2%', 'drop is "2%"', 'the share of frames that get lost, from 0 to 1, such as 0.02'],
    ['sim:arm?seed=-1', 'seed is "-1"', 'a whole number from 0, such as 7'],
    ['sim:arm?name=a/b', 'name is "a/b"', 'letters, digits, _ and -, such as wren'],
  ])('%j is a mistake that says what would be right', (text, wrong, right) => {
    expect(parseAddress(text)).toEqual({ kind: 'mistake', text, wrong, right });
  });

  it('never throws, and keeps the text it was given', () => {
    const piece = fc.constantFrom(
      'serial',
      'tcp',
      'udp',
      'sim',
      'hand',
      'arm',
      ':',
      '?',
      '=',
      '&',
      '[',
      ']',
      'baud',
      '9',
      '/dev/',
    );
    const text = fc.oneof(
      fc.string(),
      fc.array(piece, { maxLength: 9 }).map((pieces) => pieces.join('')),
    );
    fc.assert(
      fc.property(text, (given) => {
        const address = parseAddress(given);
        expect(address.text).toBe(given);
        const isSilent = address.kind === 'mistake' && (address.wrong === '' || address.right === '');
        expect(isSilent, 'a mistake says what is wrong and what would be right').toBe(false);
      }),
    );
  });

  it('suggests addresses that are right, wherever it suggests a whole one', () => {
    for (const text of [
      '/dev/ttyACM0',
      'COM3',
      'serail:/dev/ttyACM0',
      'serial: COM3',
      'tcp://wren.local:7000',
      'sim:hnad',
    ]) {
      const mistake = parseAddress(text);
      expect(mistake.kind === 'mistake' && parseAddress(mistake.right).kind).toMatch(/serial|tcp|sim/);
    }
  });
});
