import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { cobsBytesMax, cobsDecode, cobsEncode } from '../../src/wire/cobs.ts';

const bytes = fc.oneof(
  fc.uint8Array({ maxLength: 800 }),
  // Few zeros: blocks then fill to their 254 bytes.
  fc
    .array(fc.integer({ min: 0, max: 300 }), { maxLength: 800 })
    .map((all) => Uint8Array.from(all, (n) => Math.min(n, 1))),
);

function encoded(input: Uint8Array): Uint8Array {
  const out = new Uint8Array(cobsBytesMax(input.length) + 1);
  return out.subarray(0, cobsEncode(input, input.length, out, 0));
}

describe('cobs', () => {
  it('gives back what it was given', () => {
    fc.assert(
      fc.property(bytes, (input) => {
        const stuffed = encoded(input);
        const out = new Uint8Array(stuffed.length);
        expect(out.subarray(0, cobsDecode(stuffed, stuffed.length, out))).toEqual(input);
      }),
    );
  });

  it('may decode in place', () => {
    fc.assert(
      fc.property(bytes, (input) => {
        const stuffed = encoded(input);
        expect(stuffed.subarray(0, cobsDecode(stuffed, stuffed.length, stuffed))).toEqual(input);
      }),
    );
  });

  it('writes no zero', () => {
    fc.assert(
      fc.property(bytes, (input) => {
        expect(encoded(input)).not.toContain(0);
      }),
    );
  });

  it('never reads or writes beyond its bytes, whatever they are', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 300 }), (noise) => {
        const out = new Uint8Array(noise.length + 1).fill(0xaa);
        const length = cobsDecode(noise, noise.length, out);
        expect(length).toBeLessThanOrEqual(noise.length);
        expect(out[noise.length]).toBe(0xaa);
      }),
    );
  });

  it('takes an empty frame for none', () => {
    expect(cobsDecode(new Uint8Array(0), 0, new Uint8Array(1))).toBe(-1);
  });
});
