import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { csvSheet } from '../../src/take/csv.ts';
import { NUMBER_BYTES_MAX, putNumber } from '../../src/take/digits.ts';
import { row as makeRow } from '../../src/take/row.ts';
import type { TableColumn } from '../../src/take/table.ts';
import { headerOf, TWO_ARMS } from './studio.ts';

function digits(value: number): string {
  const bytes = new Uint8Array(NUMBER_BYTES_MAX + 3);
  return Buffer.from(bytes.subarray(0, putNumber(value, bytes, 3))).toString('latin1', 3);
}

describe('a number in a table', () => {
  it.each([
    [0, '0'],
    [-0, '0'],
    [-1e-7, '0'],
    [1e-6, '0.000001'],
    [-1.5, '-1.5'],
    [99.99, '99.99'],
    [99.999_999_9, '100'],
    [100_000_000, '100000000'],
    [36_000_000_000, '36000000000'],
    [Number.MAX_SAFE_INTEGER, '9007199254740991'],
    [-Number.MAX_SAFE_INTEGER, '-9007199254740991'],
    [1e300, '1e+300'],
    [-Number.MAX_VALUE, '-1.7976931348623157e+308'],
    [Infinity, 'Infinity'],
  ])('%s is written %s', (value, text) => {
    expect(digits(value)).toBe(text);
  });

  it('is within half a millionth, and without zeros that say nothing', () => {
    fc.assert(
      fc.property(fc.double({ min: -1e8, max: 1e8, noNaN: true }), (value) => {
        // Below 1e15 millionths a double's shortest digits are those of the rounded number.
        const rounded = (Math.sign(value) * Math.round(Math.abs(value) * 1e6)) / 1e6;
        expect(digits(value)).toBe(`${rounded}`);
      }),
    );
  });

  it('is exact where it is whole', () => {
    fc.assert(
      fc.property(fc.maxSafeInteger(), (value) => {
        expect(digits(value)).toBe(`${value}`);
      }),
    );
  });
});

describe('a table in CSV', () => {
  const values = [0, 0, 0, 1, -2.5, 1234.000_001, Number.NaN];
  const words = ['', '', 'following', 'a "quoted", name', 'two\nlines'];
  const cell = fc.oneof(
    fc.record({ kind: fc.constant('number' as const), value: fc.constantFrom(...values) }),
    fc.record({ kind: fc.constant('text' as const), value: fc.constantFrom(...words) }),
  );

  it('says in each line what each cell is, whatever stood in the line before', () => {
    const lines = fc
      .array(cell, { minLength: 1, maxLength: 12 })
      .chain((first) =>
        fc.tuple(
          fc.constant(first.map(({ kind }) => kind)),
          fc.array(
            fc.tuple(
              ...first.map(({ kind }) => fc.constantFrom<string | number>(...(kind === 'text' ? words : values))),
            ),
            { maxLength: 30 },
          ),
        ),
      );
    fc.assert(
      fc.property(lines, fc.boolean(), ([kinds, rows], withTake) => {
        let now: readonly (string | number)[] = [];
        const columns = kinds.map((kind, i) => ({ name: `c${i}`, kind, of: () => now[i] }) as TableColumn);
        const pieces: Uint8Array[] = [];
        const sheet = csvSheet(columns, withTake, (bytes) => pieces.push(bytes));
        const row = makeRow(headerOf(TWO_ARMS));
        for (const line of rows) {
          now = line;
          sheet.add('bow', row);
        }
        sheet.end();
        const quoted = (value: string | number): string =>
          Number.isNaN(value) ? '' : /[",\n]/.test(`${value}`) ? `"${`${value}`.replaceAll('"', '""')}"` : `${value}`;
        const lead = (text: string): string[] => (withTake ? [text] : []);
        const wanted = [
          [...lead('take'), ...kinds.map((_, i) => `c${i}`)].join(','),
          ...rows.map((line) => [...lead('bow'), ...line.map(quoted)].join(',')),
        ];
        expect(Buffer.concat(pieces).toString()).toBe(`${wanted.join('\n')}\n`);
      }),
    );
  });

  it('is written out in portions, however long it is', () => {
    const pieces: Uint8Array[] = [];
    let k = 0;
    const columns: TableColumn[] = [
      { name: 'k', kind: 'integer', of: () => k },
      { name: 'still', kind: 'text', of: () => 'x'.repeat(200) },
    ];
    const sheet = csvSheet(columns, false, (bytes) => pieces.push(bytes));
    const row = makeRow(headerOf(TWO_ARMS));
    for (; k < 5_000; k++) sheet.add('', row);
    sheet.end();
    expect(pieces.length).toBeGreaterThan(3);
    expect(Math.max(...pieces.map(({ length }) => length))).toBeLessThan(400_000);
    const lines = Buffer.concat(pieces).toString().trimEnd().split('\n').slice(1);
    expect(lines).toEqual(Array.from({ length: 5_000 }, (_, i) => `${i},${'x'.repeat(200)}`));
  });
});
