import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compileTemplate, type Template } from '../../src/wire/template.ts';
import type { OutputWiring } from '../../src/wire/types.ts';
import { WREN } from './boards.ts';
import { frameOf } from './told.ts';

const ONE: OutputWiring = {
  follower: 'wren',
  joints: ['shoulder'],
  servos: [{ channel: 5, minUs: 0, maxUs: 20_000, joint: 'shoulder' }],
  power: null,
};

function compiled(text: string, output = WREN): Template {
  const template = compileTemplate(text, output);
  if (template.kind === 'mistake') throw new Error(`${template.wrong}; ${template.remedy}`);
  return template;
}

function line(text: string, pulsesUs: number[], anglesDeg: number[] = [], output = WREN): string {
  const template = compiled(text, output);
  const out = new Uint8Array(template.bytesMax);
  return Buffer.from(out.subarray(0, template.write(frameOf(pulsesUs, anglesDeg), out))).toString();
}

describe('a template', () => {
  for (const [text, expected] of [
    ['{shoulder.us},{elbow.us},{twist.us}\n', '1500,901,2000\n'],
    ['S{shoulder.deg:1}E{elbow.deg}T{twist.deg:0}\r\n', 'S-12.3E0.0T90\r\n'],
    ['{{{shoulder.us:2}}} {elbow.us:1};{twist.us:4}#', '{1500.25} 900.8;2000.0000#'],
    ['#5P{5.us} #6P{6.us} #17P{17.us}\r', '#5P1500 #6P901 #17P2000\r'],
    ['é{shoulder.us}{elbow.us}{twist.us}', 'é15009012000'],
  ] as const) {
    it(`becomes the line a sketch reads: ${JSON.stringify(text)}`, () => {
      expect(line(text, [1_500.25, 900.75, 2_000], [-12.34, -0.04, 90.4])).toBe(expected);
    });
  }

  it('writes all joints while only some have pulses, because a line cannot leave one out', () => {
    const template = compiled('{shoulder.us},{elbow.us},{twist.us}\n');
    const out = new Uint8Array(template.bytesMax);
    expect(Buffer.from(out.subarray(0, template.write(frameOf([1500, 1000, 2000], [], 1), out))).toString()).toBe(
      '1500,1000,2000\n',
    );
  });

  it('tells the pulse as it was rounded, or as it was where only the angle is sent', () => {
    const template = compiled('{shoulder.us} {elbow.us:2} {twist.deg}\n');
    const frame = frameOf([1_500.4, 900.126, 1_234.5], [0, 0, 0]);
    template.write(frame, new Uint8Array(template.bytesMax));
    expect([...frame.sentUs]).toEqual([1_500, 900.13, 1_234.5]);
  });

  it('writes what JavaScript writes', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 4 }), fc.integer({ min: 0, max: 20_000 * 16 }), (decimals, sixteenths) => {
        const pulseUs = sixteenths / 16;
        // toFixed rounds exact halves of these binary fractions up, as Math.round does.
        const expected = (Math.round(pulseUs * 10 ** decimals) / 10 ** decimals).toFixed(decimals);
        expect(line(`{shoulder.us:${decimals}}`, [pulseUs], [], ONE)).toBe(expected);
      }),
    );
  });

  it('writes angles of either sign that read back within half a last digit', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 4 }), fc.double({ min: -720, max: 720, noNaN: true }), (decimals, deg) => {
        const text = line(`{shoulder.deg:${decimals}}`, [1_500], [deg], ONE);
        expect(text).toMatch(/^-?\d+(\.\d+)?$/);
        expect(Math.abs(Number(text) - deg)).toBeLessThanOrEqual(0.5 / 10 ** decimals + 1e-9);
        expect(text).not.toMatch(/^-0(\.0*)?$/);
      }),
    );
  });

  it('never writes more than it announced', () => {
    const template = compiled('{shoulder.deg:4} {elbow.us:4} {twist.us}\n');
    const out = new Uint8Array(100);
    const length = template.write(frameOf([1e9, 1e9, 1e9], [-1e9, 0, 0]), out);
    expect(length).toBe(template.bytesMax);
    expect(Buffer.from(out.subarray(0, length)).toString()).toBe('-9999.0000 2400.0000 2000\n');
  });

  it('lets no angle out that is not a number', () => {
    const template = compiled('{shoulder.deg}', ONE);
    expect(() => template.write(frameOf([1_500], [Number.NaN]), new Uint8Array(20))).toThrow(RangeError);
  });
});

describe('a mistaken template', () => {
  const all = '{shoulder.us}{elbow.us}{twist.us}';
  for (const [text, code, offset, wrong, remedy] of [
    [`S{shoulder.us`, 'unclosed', 1, '"{"', 'close it'],
    [`${all}}`, 'unopened', all.length, '"}"', '"}}"'],
    [`a {shoulder}`, 'form', 2, '"{shoulder}"', '{joint.us}'],
    [`{shoulder.rad}`, 'form', 0, '"{shoulder.rad}"', '{joint.deg}'],
    [`{}`, 'form', 0, '"{}"', '{joint.us}'],
    [`{shoulder.us} {sholder.us}`, 'name', 14, '"sholder"', 'known: shoulder, elbow, twist'],
    [`{nose.deg}`, 'name', 0, '"nose"', 'known: shoulder, elbow, twist'],
    [`{shoulder.deg:5}`, 'decimals', 0, '5 decimals', '4 at most'],
    [`${all}\\n`, 'escape', all.length, '"\\n"', 'double quotes'],
    [`{shoulder.us},{elbow.deg}\n`, 'unsent', 26, 'servo 17 of twist', '{17.us} or {twist.deg}'],
  ] as const) {
    it(`says where, what is wrong and what would be right: ${JSON.stringify(text)}`, () => {
      expect(compileTemplate(text, WREN)).toEqual({
        kind: 'mistake',
        code,
        offset,
        wrong: expect.stringContaining(wrong),
        remedy: expect.stringContaining(remedy),
      });
    });
  }

  it('leaves out the second servo of a joint, which only its channel names', () => {
    const output: OutputWiring = {
      ...ONE,
      servos: [...ONE.servos, { channel: 6, minUs: 500, maxUs: 2500, joint: 'shoulder' }],
    };
    expect(compileTemplate('{shoulder.us}\n', output)).toMatchObject({ code: 'unsent' });
    expect(line('{shoulder.us} {6.us}\n', [1_000, 2_000], [], output)).toBe('1000 2000\n');
    expect(line('{shoulder.deg:0}\n', [1_000, 2_000], [45], output)).toBe('45\n');
  });
});
