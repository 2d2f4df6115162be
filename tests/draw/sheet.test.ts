import { describe, expect, it } from 'vitest';
import { paperScale, roundLength, scaleText } from '../../src/draw/paper-scale.ts';
import { armSheet } from '../../src/draw/sheet.ts';
import type { SheetRow } from '../../src/draw/sheet.ts';
import { element, escaped, hundredths, pathData } from '../../src/draw/svg.ts';
import { arm, link, range, Y, Z } from './arms.ts';

const CRANE: SheetRow = {
  title: 'crane <&> "tall"',
  arm: arm([link(0, Z, [0, 0, 0.1]), link(1, Y, [0, 0, 0.4])], {
    footprintM: [
      [0.15, 0.1],
      [-0.15, 0.1],
      [-0.15, -0.1],
      [0.15, -0.1],
    ],
  }),
  ranges: [range(-30, 30), range(-45, 90)],
  keepOut: [
    { kind: 'below', zM: 0.05 },
    { kind: 'box', minM: [0.2, -0.1, 0], maxM: [0.3, 0.1, 0.2] },
  ],
  poses: [
    { label: 'rest', anglesRad: Float64Array.of(0, 0) },
    { label: 'worst', anglesRad: Float64Array.of(0, Math.PI / 2) },
  ],
  figures: [
    { what: 'load', value: '120 %', marked: true },
    { what: 'reach', value: '500 mm', marked: false },
  ],
};

/** Elements with their attributes, in order; throws where tags do not nest. */
function elements(xml: string): readonly { name: string; attributes: Map<string, string>; text: string }[] {
  const open: string[] = [];
  const found: { name: string; attributes: Map<string, string>; text: string }[] = [];
  let rest = xml;
  for (const [whole, close, name = '', attributes = '', alone, text = ''] of xml.matchAll(
    /<(\/?)([\w]+)((?: [\w:-]+="[^"<&]*(?:&#\d+;[^"<&]*)*")*)(\/?)>([^<]*)/g,
  )) {
    expect(rest.startsWith(whole)).toBe(true);
    rest = rest.slice(whole.length);
    if (close === '/') {
      if (open.pop() !== name) throw new Error(`</${name}> closes nothing`);
    } else {
      if (alone !== '/') open.push(name);
      const pairs = [...attributes.matchAll(/([\w:-]+)="([^"]*)"/g)].map(
        ([, key, value]) => [String(key), String(value)] as const,
      );
      found.push({ name, attributes: new Map(pairs), text: text.trim() });
    }
  }
  expect([open, rest]).toEqual([[], '']);
  return found;
}

describe('a sheet of arms', () => {
  const svg = armSheet('yard <1>', [CRANE]);
  const all = elements(svg);
  const texts = all.filter(({ name }) => name === 'text').map(({ text }) => text);

  it('is one well-formed document with its title and units', () => {
    expect(all[0]?.name).toBe('svg');
    expect(all[0]?.attributes.get('width')).toBe('297mm');
    expect(texts).toContain('yard &#60;1&#62;');
    expect(texts).toContain('crane &#60;&#38;&#62; &#34;tall&#34;');
    expect(texts.some((text) => text.includes('millimetres'))).toBe(true);
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
  });

  it('says over in words, not in colour alone', () => {
    expect(texts).toContain('OVER: 120 %');
    expect(texts).toContain('500 mm');
  });

  it('draws true to the scale it names', () => {
    const scale = texts.find((text) => /^\d+(\.\d+)?:\d/.test(text)) ?? '';
    const [paper = Number.NaN, real = Number.NaN] = scale.split(':').map(Number);
    // Joints of the rest pose, from the side: the first axis, and the second 100 mm above it.
    const joints = all.filter(({ name }) => name === 'circle');
    const [first, second] = joints.map(({ attributes }) => Number(attributes.get('cy')));
    expect((first ?? 0) - (second ?? 0)).toBeCloseTo((100 * paper) / real, 1);
    // The worst pose is level: its tip stands 400 mm forward of the second axis.
    const tips = all.filter(({ name, attributes }) => name === 'rect' && attributes.get('width') === '1.4');
    const centre = Number(tips[1]?.attributes.get('x')) + 0.7;
    expect(centre - Number(joints[3]?.attributes.get('cx'))).toBeCloseTo((400 * paper) / real, 1);
    // The bar's length is what stands beside it.
    const bar = Number(texts.find((text) => /^\d+ mm$/.test(text) && text !== '500 mm')?.split(' ')[0]);
    const half = all.find(({ attributes }) => attributes.get('height') === '1.2')?.attributes.get('width');
    expect(2 * Number(half)).toBeCloseTo((bar * paper) / real, 1);
  });

  it('names what it shows', () => {
    for (const word of [
      'rest',
      'worst',
      'keep-out',
      'floor',
      'footprint',
      'from the side, forward →',
      'from above, forward →',
    ])
      expect(texts, word).toContain(word);
  });

  it('shows counterweights where the first pose has them, with their mass', () => {
    const links = CRANE.arm.links.map((one, i) =>
      i === 1 ? { ...one, counterweight: { massKg: 1.25, atM: [0, 0, -0.15] as const } } : one,
    );
    const drawn = elements(armSheet('yard', [{ ...CRANE, arm: { ...CRANE.arm, links } }]));
    const [paper = Number.NaN, real = Number.NaN] = (drawn.find(({ text }) => /^\d+(\.\d+)?:\d/.test(text))?.text ?? '')
      .split(':')
      .map(Number);
    const circles = drawn.filter(({ name }) => name === 'circle');
    const [weight] = circles.filter(({ attributes }) => attributes.get('r') === '1.5');
    // At rest all stands upright: the second axis is 100 mm up, the weight 150 mm below it.
    const [, second] = circles.filter(({ attributes }) => attributes.get('r') === '0.9');
    const drop = Number(weight?.attributes.get('cy')) - Number(second?.attributes.get('cy'));
    expect(drop).toBeCloseTo((150 * paper) / real, 1);
    expect(drawn.map(({ text }) => text)).toContain('1250 g');
  });

  it('grows by a row an arm', () => {
    const height = (rows: number) =>
      Number(
        elements(
          armSheet(
            'yard',
            Array.from({ length: rows }, () => CRANE),
          ),
        )[0]
          ?.attributes.get('height')
          ?.replace('mm', ''),
      );
    expect(height(2) - height(1)).toBe(128);
  });

  it('leaves a floor out that is far below, and shows a ceiling mount', () => {
    const table = armSheet('yard', [
      { ...CRANE, keepOut: [], arm: { ...CRANE.arm, base: { ...CRANE.arm.base, heightM: 5 } } },
    ]);
    expect(elements(table).some(({ text }) => text === 'floor')).toBe(false);
    const hung = { ...CRANE.arm.base, heightM: 0.6, tiltRad: [Math.PI, 0] as const, footprintM: null };
    expect(
      elements(armSheet('yard', [{ ...CRANE, arm: { ...CRANE.arm, base: hung } }])).some(
        ({ text }) => text === 'floor',
      ),
    ).toBe(true);
  });
});

describe('a scale on paper', () => {
  it.each([
    // 1.9 m on 100 mm needs 1:19; the next round one is 1:20.
    [1.9, 0.1, 20, '1:20'],
    [2.5, 0.1, 25, '1:25'],
    [0.1, 0.1, 1, '1:1'],
    [0.01, 0.1, 0.1, '10:1'],
    // Four times as large would fit; twice is the next round scale.
    [0.025, 0.1, 0.25, '4:1'],
  ])('of %f m on %f m is 1 to %f', (lengthM, paperM, n, text) => {
    expect(paperScale(lengthM, paperM)).toBeCloseTo(n, 12);
    expect(scaleText(n)).toBe(text);
  });

  it('has a bar of a round length', () => {
    expect([0.9, 1, 1.99, 4.9, 5, 77].map(roundLength)).toEqual([0.5, 1, 1, 2, 5, 50]);
  });
});

describe('SVG text', () => {
  it('cannot break out of its element', () => {
    expect(escaped(`<script>&'"\u0000\u0007\ud800`)).toBe('&#60;script&#62;&#38;&#39;&#34;');
    expect(element('text', { 'data-x': '"><b' }, escaped('a<b'))).toBe(
      '<text data-x="&#34;&#62;&#60;b">a&#60;b</text>',
    );
  });

  it('writes numbers shortly', () => {
    expect([1, 1.005, -0.001, 12.3456].map(hundredths)).toEqual(['1', '1', '0', '12.35']);
    expect(
      pathData(
        [
          [0, 0],
          [1.5, 2],
        ],
        true,
      ),
    ).toBe('M0 0L1.5 2Z');
  });
});
