import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { clipped, columnsFor, fitted, inColumns, span, widthOf, wrapped } from '../../../src/cli/view/layout.ts';
import { textOf } from './scenes.ts';

describe('A line', () => {
  it('is cut to its width with a mark', () => {
    expect(textOf(clipped([span('left'), span(' right')], 7, '…'))).toBe('left r…');
    expect(textOf(clipped([span('left')], 4, '…'))).toBe('left');
  });

  it('shows control characters as question marks: a board must not steer the terminal', () => {
    expect(span('a\x1b[2Jb\n').text).toBe('a?[2Jb?');
  });

  it('drops what matters least where there is no room, the last of equals first', () => {
    const part = (text: string, matters: number) => ({ line: [span(text)], matters });
    const parts = [part('state', 9), part('rate', 1), part('lag', 2), part('port', 2)];
    expect(textOf(fitted(parts, 30, 2))).toBe('state  rate  lag  port');
    expect(textOf(fitted(parts, 20, 2))).toBe('state  lag  port');
    expect(textOf(fitted(parts, 12, 2))).toBe('state  lag');
    expect(textOf(fitted(parts, 3, 2))).toBe('state');
  });

  it('has no gap for a part without text', () => {
    expect(
      textOf(
        fitted(
          [
            { line: [span('')], matters: 3 },
            { line: [span('a')], matters: 1 },
          ],
          9,
          2,
        ),
      ),
    ).toBe('a');
  });
});

describe('Columns', () => {
  it('are as many as fit, all of one width', () => {
    const rows = inColumns(
      [span('one'), span('three'), span('two')].map((each) => [each]),
      14,
      2,
    );
    expect(rows.map(textOf)).toEqual(['one    three  ', 'two    ']);
  });

  it('are at least one', () => {
    expect(columnsFor(20, 5, 2)).toBe(1);
  });
});

describe('Wrapped text', () => {
  it('breaks at blanks', () => {
    expect(wrapped('close it and the bridge reconnects', 12)).toEqual(['close it and', 'the bridge', 'reconnects']);
  });

  it('fits its width and keeps every word, whatever both are', () => {
    const words = fc.array(fc.string({ unit: 'grapheme-ascii', maxLength: 12 }).map((w) => w.replace(/ /g, '_')));
    fc.assert(
      fc.property(words, fc.integer({ min: 1, max: 40 }), (list, width) => {
        const lines = wrapped(list.join(' '), width);
        for (const line of lines) expect(widthOf([span(line)])).toBeLessThanOrEqual(width);
        expect(lines.join('').replaceAll(' ', '')).toBe(list.join(''));
      }),
    );
  });
});
