import { describe, expect, it } from 'vitest';
import { INK } from '../../src/draw/ink.ts';
import { type Plot, xyPlot } from '../../src/draw/xy-plot.ts';

const plot = (series: Plot['series']): string => xyPlot({ title: 'a < b & "c"', x: 'counts', y: 'degrees', series });

describe('A plot', () => {
  it('puts dots where they belong: the outer ones a twentieth of the span inside the frame', () => {
    const svg = plot([
      {
        kind: 'dots',
        mark: 'dot',
        ink: INK.blue,
        at: [
          [0, 0],
          [100, 50],
        ],
      },
    ]);
    // The frame is 14 to 85 by 7 to 47 mm; 1.1 spans fill it, so 5 % of the span are 71 / 22 and 40 / 22 mm.
    const dots = [...svg.matchAll(/<circle cx="([\d.]+)" cy="([\d.]+)"/g)].map(([, x, y]) => [Number(x), Number(y)]);
    expect(dots).toEqual([
      [expect.closeTo(14 + 71 / 22, 1), expect.closeTo(47 - 40 / 22, 1)],
      [expect.closeTo(85 - 71 / 22, 1), expect.closeTo(7 + 40 / 22, 1)],
    ]);
  });

  it('escapes what it is told to write', () => {
    expect(plot([])).toContain('a &#60; b &#38; &#34;c&#34;');
  });

  it.each([
    ['nothing', []],
    ['one dot', [{ kind: 'dots', mark: 'cross', ink: INK.blue, at: [[5, 5]] }]],
    [
      'a level line',
      [
        {
          kind: 'line',
          ink: INK.blue,
          at: [
            [0, 3],
            [9, 3],
          ],
        },
      ],
    ],
    [
      'bars and stretches',
      [
        { kind: 'bars', ink: INK.sky, width: 1, at: [[1, 4]] },
        { kind: 'stretch', from: 0, to: 1, word: 'dead' },
        { kind: 'shelf', from: 1, to: 2, word: 'gap' },
      ],
    ],
  ] as const)('of %s has no number that is none', (_, series) => {
    const svg = plot(series);
    expect(svg).toMatch(/^<svg .*<\/svg>$/);
    expect(svg).not.toMatch(/NaN|Infinity|undefined/);
  });

  it('thins a long path to what paper can show', () => {
    const at = Array.from({ length: 50_000 }, (_, i) => [i, Math.sin(i)] as const);
    expect(plot([{ kind: 'line', ink: INK.blue, at }]).length).toBeLessThan(30_000);
  });
});
