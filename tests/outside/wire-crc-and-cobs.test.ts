import { decode, encode } from 'cobs';
import { crc16ccitt } from 'crc';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { cobsBytesMax, cobsDecode, cobsEncode } from '../../src/wire/cobs.ts';
import { crc16 } from '../../src/wire/crc16.ts';

const bytes = fc.uint8Array({ maxLength: 700 });

function range(first: number, last: number): number[] {
  return Array.from({ length: last - first + 1 }, (_, index) => first + index);
}

function hex(text: string): number[] {
  return [...Buffer.from(text.replaceAll(' ', ''), 'hex')];
}

function stuffed(input: Uint8Array): Uint8Array {
  const out = new Uint8Array(cobsBytesMax(input.length));
  return out.subarray(0, cobsEncode(input, input.length, out, 0));
}

describe('CRC-16/IBM-3740', () => {
  it('has the check value of the RevEng catalogue', () => {
    // RevEng catalogue of parametrised CRC algorithms, CRC-16/IBM-3740: check 0x29b1; as transcribed in
    // akhilles/crc-catalog, src/algorithm.rs.
    expect(crc16(Buffer.from('123456789'), 0, 9)).toBe(0x29b1);
  });

  it('starts as the catalogue says', () => {
    // Same entry: init 0xffff, xorout 0x0000.
    expect(crc16(new Uint8Array(0), 0, 0)).toBe(0xffff);
  });

  it('agrees with the npm package crc', () => {
    fc.assert(
      fc.property(bytes, (input) => {
        expect(crc16(input, 0, input.length)).toBe(crc16ccitt(Buffer.from(input)));
      }),
    );
  });
});

describe('COBS', () => {
  // cmcqueen/cobs-python, src/cobs/cobs/test.py, and the examples of the Wikipedia article "Consistent Overhead Byte
  // Stuffing", as reproduced in ThierryHenry1994/cobs-codec, README.
  const vectors: readonly (readonly [string, number[], number[]])[] = [
    ['nothing', [], hex('01')],
    ['00', hex('00'), hex('01 01')],
    ['00 00', hex('00 00'), hex('01 01 01')],
    ['00 11 00', hex('00 11 00'), hex('01 02 11 01')],
    ['11 22 00 33', hex('11 22 00 33'), hex('03 11 22 02 33')],
    ['11 22 33 44', hex('11 22 33 44'), hex('05 11 22 33 44')],
    ['11 00 00 00', hex('11 00 00 00'), hex('02 11 01 01 01')],
    ['01 to fe', range(1, 254), [0xff, ...range(1, 254)]],
    ['00 and 01 to fe', [0, ...range(1, 254)], [0x01, 0xff, ...range(1, 254)]],
    ['01 to ff', range(1, 255), [0xff, ...range(1, 254), 0x02, 0xff]],
    ['02 to ff and 00', [...range(2, 255), 0], [0xff, ...range(2, 255), 0x01, 0x01]],
    ['03 to ff, 00 and 01', [...range(3, 255), 0, 1], [0xfe, ...range(3, 255), 0x02, 0x01]],
    ['12345, 00, 6789', [...Buffer.from('12345\0' + '6789')], [6, ...Buffer.from('12345'), 5, ...Buffer.from('6789')]],
  ];

  for (const [name, plain, wire] of vectors) {
    it(`stuffs and unstuffs ${name} as published`, () => {
      expect([...stuffed(Uint8Array.from(plain))]).toEqual(wire);
      const out = new Uint8Array(300);
      expect([...out.subarray(0, cobsDecode(Uint8Array.from(wire), wire.length, out))]).toEqual(plain);
    });
  }

  for (const wire of ['00', '05 31 32 33', '05 31 32 33 34 00', '05 31 32 00 34']) {
    it(`refuses ${wire}, as cobs-python does`, () => {
      // cmcqueen/cobs-python, src/cobs/cobs/test.py, decode errors.
      const input = Uint8Array.from(hex(wire));
      expect(cobsDecode(input, input.length, new Uint8Array(10))).toBe(-1);
    });
  }

  it('costs at most one byte and one more for each 254', () => {
    // Cheshire & Baker, IEEE/ACM Transactions on Networking 7(2), 1999: at most one byte in 254.
    fc.assert(
      fc.property(bytes, (input) => {
        expect(stuffed(input).length).toBeLessThanOrEqual(input.length + 1 + Math.floor(input.length / 254));
      }),
    );
  });

  it('is read by the npm package cobs, and reads it', () => {
    // That package ends a full last block with a code byte too many (0.2.1): so both are compared by what they carry.
    fc.assert(
      fc.property(bytes, (input) => {
        expect(Uint8Array.from(decode(Buffer.from(stuffed(input))))).toEqual(input);
        const theirs = Uint8Array.from(encode(Buffer.from(input)));
        const out = new Uint8Array(theirs.length);
        expect(out.subarray(0, cobsDecode(theirs, theirs.length, out))).toEqual(input);
      }),
    );
  });

  it('reads a full block that another encoder closed with a needless code byte', () => {
    const wire = Uint8Array.from([0xff, ...range(1, 254), 0x01]);
    const out = new Uint8Array(300);
    expect([...out.subarray(0, cobsDecode(wire, wire.length, out))]).toEqual(range(1, 254));
  });
});
