import { US_PER_MS } from '../clock/clock.ts';
import type { LeaderSpec } from '../leader/spec.ts';
import { nearest } from '../port/nearest.ts';
import { type Cell, cellsOf, LINE_CHARACTERS_MAX, lines } from './csv-cells.ts';
import type { CsvMistake } from './csv-mistake.ts';

/** One row. Reused: valid until the next one is asked for. */
export interface CsvReading {
  tUs: number;
  /** Parallel to the leader's inputs; NaN where the row has no value. */
  readonly counts: Float64Array;
}

/**
 * Reads recorded readings: `t_ms`, a column for each joint of the leader and, if wanted, for its buttons, in any order;
 * counts as the converter gave them; an empty cell where no value came. An enable button without a column counts as
 * held down, or nothing would ever follow.
 */
export interface ReadingsCsv {
  /** The readings in a piece of the file. After the first mistake there are none, only more mistakes. */
  push(text: string): Iterable<CsvReading>;
  end(): Iterable<CsvReading>;
  readonly mistakes: readonly CsvMistake[];
  /** Too much is wrong for the rest to be worth reading. */
  readonly hopeless: boolean;
}

export const MISTAKES_MAX = 20;

const TIME = 't_ms';
const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i;
/** In microseconds it is still a whole number that a double holds exactly. */
const TIME_MS_MAX = 9e12;

/** @param inputs how many the leader's board has */
export function readingsCsv(leader: LeaderSpec, inputs: number): ReadingsCsv {
  const split = lines();
  const mistakes: CsvMistake[] = [];
  const reading: CsvReading = { tUs: Number.NaN, counts: new Float64Array(inputs) };
  const columns = new Map([...leader.joints, ...leader.buttons].map(({ name, input }) => [name, input]));
  /** For each column its input, or `TIME`; null before the header has been read. */
  let header: readonly (number | typeof TIME)[] | null = null;
  let line = 0;
  let hopeless = false;

  const mistaken = (column: number, wrong: string, right: string): void => {
    mistakes.push({ line, column, wrong, right });
    if (mistakes.length >= MISTAKES_MAX) hopeless = true;
  };

  const readHeader = (text: string): void => {
    const before = mistakes.length;
    const cells = cellsOf(text);
    if (cells.length === 1 && /[;\t]/.test(text)) {
      mistaken(
        1,
        'the columns are not separated by commas',
        'separate them by commas, and write decimals with a point',
      );
      hopeless = true;
      return;
    }
    const wanted = [TIME, ...columns.keys()];
    cells.forEach(({ text: name, column }, i) => {
      if (cells.findIndex((cell) => cell.text === name) < i)
        mistaken(column, `column ${name} stands here again`, 'keep one of the two');
      else if (!wanted.includes(name)) mistaken(column, `there is no column "${name}"`, hint(name, wanted));
    });
    for (const name of [TIME, ...leader.joints.map((joint) => joint.name)]) {
      if (!cells.some((cell) => cell.text === name))
        mistaken(1, `column ${name} is missing`, 'give it a column; its cells may be empty where no value came');
    }
    // Which cell is which is not known: every row would only repeat the mistake.
    hopeless = mistakes.length > before;
    header = cells.map(({ text: name }) => columns.get(name) ?? TIME);
    for (const { does, pressed, name, input } of leader.buttons) {
      const isMissing = does === 'enable' && !cells.some((cell) => cell.text === name);
      reading.counts[input] = isMissing ? (pressed === 'below' ? leader.countsMin : leader.countsMax) : Number.NaN;
    }
  };

  const readTime = ({ text, column }: Cell): void => {
    const ms = NUMBER.test(text) ? Number(text) : Number.NaN;
    const tUs = Math.round(ms * US_PER_MS);
    if (Number.isNaN(ms)) mistaken(column, `"${text}" is no time`, 'write milliseconds, such as 20 or 20.5');
    else if (Math.abs(ms) > TIME_MS_MAX) mistaken(column, `${text} ms is out of reach`, 'count from the first reading');
    else if (tUs < reading.tUs)
      mistaken(column, `time goes back, from ${reading.tUs / US_PER_MS} to ${text} ms`, 'sort the rows by time');
    else reading.tUs = tUs;
  };

  const readCounts = ({ text, column }: Cell, input: number): void => {
    reading.counts[input] = Number.NaN;
    if (text === '') return;
    const value = NUMBER.test(text) ? Number(text) : Number.NaN;
    const { countsMin, countsMax } = leader;
    if (Number.isNaN(value)) mistaken(column, `"${text}" is no number`, 'write counts, or nothing where no value came');
    else if (value < countsMin || value > countsMax)
      mistaken(column, `the converter cannot read ${text}`, `its counts go from ${countsMin} to ${countsMax}`);
    else reading.counts[input] = value;
  };

  /** True when the line has given a reading. */
  const read = (text: string): boolean => {
    line++;
    if (line === 1) {
      readHeader(text.replace(/^\uFEFF/, ''));
      return false;
    }
    if (text.trim() === '' || hopeless || header === null) return false;
    if (text.length > LINE_CHARACTERS_MAX) {
      mistaken(1, 'the line is longer than any row of readings', 'check that the file is CSV');
      return false;
    }
    const cells = cellsOf(text);
    if (cells.length !== header.length) {
      mistaken(1, `${cells.length} cells under ${header.length} columns`, 'give each column a cell, empty if need be');
      return false;
    }
    for (let i = 0; i < cells.length; i++) {
      const input = header[i] as number | typeof TIME;
      if (input === TIME) readTime(cells[i] as Cell);
      else readCounts(cells[i] as Cell, input);
    }
    return mistakes.length === 0;
  };

  return {
    mistakes,
    get hopeless() {
      return hopeless;
    },
    *push(text) {
      for (const piece of split.push(text)) if (read(piece)) yield reading;
    },
    *end() {
      const last = split.rest();
      if (last !== '' && read(last)) yield reading;
      if (line === 0) {
        line = 1;
        mistaken(1, 'there is nothing in it', `begin with ${[TIME, ...columns.keys()].join(',')}`);
      }
    },
  };
}

function hint(name: string, wanted: readonly string[]): string {
  const near = nearest(name, wanted);
  return near === null ? `the leader has ${wanted.slice(1).join(', ')}` : `did you mean ${near}?`;
}
