import { join } from 'node:path';
import { US_PER_S } from '../clock/clock.ts';
import { offlineDisk, wholeFile } from './disk.ts';
import { diskFault, takeFault, type TakeFault } from './fault.ts';
import { takeFile } from './folder.ts';
import { type Made, POSING, type TakeHeader } from './header.ts';
import type { Mark, Take } from './reader.ts';
import { copyRow, type Row } from './row.ts';
import { takeWriter } from './writer.ts';
import { existsSync } from 'node:fs';

/** Work on whole takes: yields the share that is done, so that it can be shown and broken off; nothing half is left. */
export type Work<T> = Generator<number, T | TakeFault>;

export interface Derived {
  readonly take: string;
  readonly rows: number;
}

/** Rows between two looks at whether somebody wants it to end. */
const ROWS_A_STEP = 10_000;

/**
 * Writes a new take made of others.
 * @param rows in order of time; may be reused objects
 * @param expected about how many they will be
 */
export function* derive(
  folder: string,
  name: string,
  from: Take,
  header: TakeHeader,
  rows: Iterable<Row>,
  expected: number,
): Work<Derived> {
  const place = takeFile(folder, name);
  if ('fault' in place) return place.fault;
  if (existsSync(place.file)) return takeFault('TAKE_EXISTS', name, 'there is a take of this name');
  try {
    const whole = wholeFile(place.file);
    try {
      const writer = takeWriter(name, header, from.profiles, offlineDisk(whole));
      for (const row of rows) {
        copyRow(row, writer.row);
        writer.append();
        if (writer.is.rows % ROWS_A_STEP === 0) yield Math.min(1, writer.is.rows / expected);
      }
      writer.finish();
      const fault = writer.is.fault ?? whole.keep();
      return fault ?? { take: name, rows: writer.is.rows };
    } finally {
      whole.drop();
    }
  } catch (error) {
    if (error instanceof Error && 'syscall' in error) return diskFault(join(folder, name), error);
    throw error;
  }
}

/** The header of a take made of `parents`, the first of which gives its joints. */
export function derivedHeader(parents: readonly Take[], by: Made['by'], how: Made['how']): TakeHeader {
  const [first] = parents as readonly [Take, ...Take[]];
  const posed = POSING.has(by) || parents.some((parent) => parent.header.made.posed);
  const made = { by, how, posed, parents: parents.map(({ name, rows }) => ({ take: name, rows })) };
  return { ...first.header, fromStart: false, made };
}

/** A moment of a take: a mark's name, or a time such as `2.5s`, `500ms` or `-1s` from its end. */
export function momentUs(take: Take, text: string): number | TakeFault {
  const mark = take.marks.find(({ name }: Mark) => name === text);
  if (mark !== undefined) return mark.tUs;
  const found = /^(-?)(\d+(?:\.\d+)?)(us|ms|s|min|h)?$/.exec(text.trim());
  if (found === null) return takeFault('TAKE_MARK', take.name, `it has no mark "${text}"`);
  const unitUs = { us: 1, ms: 1e3, s: 1e6, min: 60e6, h: 3_600e6 }[found[3] ?? 's'] ?? 1e6;
  const us = Math.round(Number(found[2]) * unitUs);
  return found[1] === '-' ? take.durationUs - us : us;
}

export interface Stretch {
  readonly fromUs: number;
  readonly toUs: number;
}

/** From one moment to another, both inside the take. */
export function stretchOf(take: Take, from: string | undefined, to: string | undefined): Stretch | TakeFault {
  const fromUs = from === undefined ? 0 : momentUs(take, from);
  if (typeof fromUs !== 'number') return fromUs;
  const toUs = to === undefined ? take.durationUs : momentUs(take, to);
  if (typeof toUs !== 'number') return toUs;
  if (fromUs < 0 || toUs > take.durationUs || fromUs >= toUs) {
    const seconds = (us: number): string => `${Number((us / US_PER_S).toFixed(3))} s`;
    const wrong = `${seconds(fromUs)} to ${seconds(toUs)} is no stretch of its ${seconds(take.durationUs)}`;
    return takeFault('TAKE_RANGE', take.name, wrong);
  }
  return { fromUs, toUs };
}
