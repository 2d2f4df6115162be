import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { csvMistakeLine } from '../../src/cli/csv-mistake.ts';
import { readingsCsv } from '../../src/cli/readings-csv.ts';
import type { LeaderSpec } from '../../src/leader/spec.ts';
import { compileMap } from '../../src/map/compile.ts';

const map = compileMap(
  [
    [0, -1],
    [1023, 1],
  ],
  'straight',
  'extend',
);
const joint = (name: string, input: number) => ({
  name,
  input,
  map,
  travelMin: 0,
  travelMax: 1023,
  despike: 1,
  smooth: null,
});
const LEADER: LeaderSpec = {
  name: 'stick',
  joints: [joint('base', 0), joint('elbow', 1)],
  buttons: [{ name: 'pedal', input: 2, pressed: 'above', counts: 500, does: 'enable' }],
  timeoutUs: 250_000,
  countsMin: 0,
  countsMax: 1023,
};

interface Row {
  readonly tUs: number;
  readonly counts: readonly number[];
}

function read(...pieces: string[]) {
  const csv = readingsCsv(LEADER, 3);
  const rows: Row[] = [];
  for (const piece of pieces) for (const { tUs, counts } of csv.push(piece)) rows.push({ tUs, counts: [...counts] });
  for (const { tUs, counts } of csv.end()) rows.push({ tUs, counts: [...counts] });
  return { rows, mistakes: csv.mistakes.map((mistake) => csvMistakeLine('r.csv', mistake)) };
}

describe('Readings as CSV', () => {
  it('are rows of time and counts, columns in any order', () => {
    const { rows, mistakes } = read('elbow,t_ms,base,pedal\n20,1.5,10,1023\n21,6.5,11,0\n');
    expect(mistakes).toEqual([]);
    expect(rows).toEqual([
      { tUs: 1_500, counts: [10, 20, 1023] },
      { tUs: 6_500, counts: [11, 21, 0] },
    ]);
  });

  it('have no value where a cell is empty', () => {
    expect(read('t_ms,base,elbow,pedal\n0,,5,\n').rows).toEqual([{ tUs: 0, counts: [Number.NaN, 5, Number.NaN] }]);
  });

  it('hold an enable button down that has no column, or nothing would follow', () => {
    expect(read('t_ms,base,elbow\n0,1,2\n').rows[0]?.counts).toEqual([1, 2, 1023]);
  });

  it('come as spreadsheets write them: byte order mark, quotes, CR LF, blank and unended last lines', () => {
    const { rows, mistakes } = read('\uFEFF"t_ms", "base" ,elbow\r\n0,"1", 2\r\n\r\n5,3,4');
    expect(mistakes).toEqual([]);
    expect(rows.map(({ tUs, counts }) => [tUs, ...counts])).toEqual([
      [0, 1, 2, 1023],
      [5_000, 3, 4, 1023],
    ]);
  });

  it('are the same in whatever pieces they come', () => {
    const text = 't_ms,base,elbow\n0,1,2\n5.25,,1023\r\n10,4e1,3.5\n';
    const whole = read(text);
    expect(whole.rows).toHaveLength(3);
    fc.assert(
      fc.property(fc.array(fc.nat(text.length), { maxLength: 6 }), (cuts) => {
        const at = [0, ...cuts.sort((a, b) => a - b), text.length];
        expect(read(...at.slice(1).map((end, i) => text.slice(at[i], end)))).toEqual(whole);
      }),
    );
  });

  it('may repeat an instant, as two readings of one chunk do', () => {
    expect(read('t_ms,base,elbow\n5,1,2\n5,1,3\n').mistakes).toEqual([]);
  });
});

describe('Mistakes in CSV', () => {
  it.each([
    [
      'an unknown column',
      't_ms,bse,elbow\n',
      ['1:6: there is no column "bse"; did you mean base?', '1:1: column base is missing; '],
    ],
    [
      'a foreign column',
      't_ms,base,elbow,temperature\n',
      ['1:17: there is no column "temperature"; the leader has base, elbow, pedal'],
    ],
    ['a column twice', 't_ms,base,elbow,base\n', ['1:17: column base stands here again; keep one']],
    ['no time', 'base,elbow\n', ['1:1: column t_ms is missing; ']],
    ['semicolons', 't_ms;base;elbow\n0;1;2\n', ['1:1: the columns are not separated by commas; separate them']],
    ['an empty file', '', ['1:1: there is nothing in it; begin with t_ms,base,elbow,pedal']],
    ['no number', 't_ms,base,elbow\n0,1,x\n', ['2:5: "x" is no number; write counts, or nothing']],
    ['text of a number that is none', 't_ms,base,elbow\n0,NaN,0x10\n', ['2:3: "NaN" is no', '2:7: "0x10" is no']],
    ['a time that is none', 't_ms,base,elbow\nnow,1,2\n', ['2:1: "now" is no time; ']],
    ['no time in a row', 't_ms,base,elbow\n,1,2\n', ['2:1: "" is no time; ']],
    ['an endless time', 't_ms,base,elbow\n1e300,1,2\n', ['2:1: 1e300 ms is out of reach; ']],
    [
      'time that goes back',
      't_ms,base,elbow\n5,1,2\n4.5,1,2\n',
      ['3:1: time goes back, from 5 to 4.5 ms; sort the rows'],
    ],
    [
      'counts the converter cannot read',
      't_ms,base,elbow\n0,1024,-1\n',
      ['2:3: the converter cannot read 1024; its counts go from 0 to 1023', '2:8: the converter cannot read -1; '],
    ],
    ['a short row', 't_ms,base,elbow\n0,1\n', ['2:1: 2 cells under 3 columns; ']],
  ])('%s', (_, text, expected) => {
    const { mistakes, rows } = read(text);
    expect(mistakes).toEqual(expected.map((start) => expect.stringContaining(`r.csv:${start}`)));
    expect(mistakes).toHaveLength(expected.length);
    expect(rows.length).toBeLessThanOrEqual(1);
  });

  it('end the readings but not the search for more mistakes, up to twenty', () => {
    const { rows, mistakes } = read(`t_ms,base,elbow\n0,1,2\n${'1,x,2\n'.repeat(30)}2,1,2\n`);
    expect(rows).toHaveLength(1);
    expect(mistakes).toHaveLength(20);
  });

  it('do not fill the memory: a line without an end is given up in pieces', () => {
    const { mistakes } = read('t_ms,base,elbow\n', 'x'.repeat(200_000), 'x'.repeat(200_000));
    expect(mistakes[0]).toContain('2:1: the line is longer than any row of readings');
  });
});
