import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { tableFromIPC as flechetteTable } from '@uwdata/flechette';
import { tableFromArrays, tableFromIPC, tableToIPC } from 'apache-arrow';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { isTakeFault } from '../../src/take/fault.ts';
import { openTake } from '../../src/take/reader.ts';
import { readingAhead } from '../../src/take/read-ahead.ts';
import { summarize } from '../../src/take/summary.ts';
import { bytesOf, fileWriter, headerOf, opened, rowsOf, takesFolderForTests, TWO_ARMS } from './studio.ts';

const folder = takesFolderForTests();
const BATCHES = 8;
const ROWS = 50;

async function written(name: string): Promise<string> {
  const writer = fileWriter(folder, name, headerOf(TWO_ARMS));
  for (let i = 0; i < BATCHES * ROWS; i++) {
    writer.row.tUs = i * 4_000 + (i >= 200 ? 2 ** 33 : 0);
    writer.row.event = 0;
    writer.row.name = i === 170 ? 'überall' : '';
    writer.row.counts.fill(i);
    for (const arm of writer.row.followers) {
      arm.commanded = i % 2;
      arm.angleRad.fill(i / 3);
      arm.speedRadS.fill(-i);
    }
    writer.append();
    if (i % ROWS === ROWS - 1) writer.flush();
  }
  await writer.end();
  return join(folder, `${name}.arrows`);
}

function codeOf(file: string): string {
  const found = openTake(file);
  return isTakeFault(found) ? found.code : 'opened';
}

function fileOf(name: string, bytes: Uint8Array | string): string {
  const file = join(folder, `${name}.arrows`);
  writeFileSync(file, bytes);
  return file;
}

describe('a take', () => {
  it('gives back the rows that were written', async () => {
    const take = opened(await written('whole'));
    const rows = rowsOf(take);
    expect(rows).toHaveLength(BATCHES * ROWS);
    expect(take.lostBytes).toBeNull();
    expect(take.marks).toEqual([{ name: 'überall', tUs: 680_000 }]);
    rows.forEach((row, i) => {
      expect(row.tUs).toBe(i * 4_000 + (i >= 200 ? 2 ** 33 : 0));
      expect(row.counts).toEqual(Float64Array.of(i, i));
      expect(row.followers[1]?.angleRad).toEqual(Float64Array.of(i / 3, i / 3));
      expect(row.followers[0]?.commanded).toBe(i % 2);
    });
    take.close();
  });

  it('is read from any moment on', async () => {
    const take = opened(await written('from'));
    const rows = rowsOf(take, 500_000);
    expect(rows[0]?.tUs).toBeLessThanOrEqual(500_000);
    expect(rows[0]?.tUs).toBeGreaterThan(500_000 - 2 * ROWS * 4_000);
    expect(rows.at(-1)?.tUs).toBe(take.durationUs);
  });

  it('is brought into memory ahead of one who plays it, a second before it is due at the latest', async () => {
    const take = opened(await written('ahead'));
    const fetched: [number, number][] = [];
    const watched = { ...take, fetch: (fromUs: number, toUs: number) => void fetched.push([fromUs, toUs]) };
    let rows = 0;
    for (const row of readingAhead(watched).readFrom(0)) {
      const [fromUs, toUs] = fetched.at(-1) ?? [Number.NaN, Number.NaN];
      expect(fromUs).toBeLessThanOrEqual(row.tUs);
      expect(toUs).toBeGreaterThan(row.tUs + 1_000_000);
      rows++;
    }
    expect(rows).toBe(take.rows);
    // The stamps leap by two hours once; before and after it there are 0.8 s of rows each.
    expect(fetched).toHaveLength(2);
    // Reading a part that is fetched meanwhile, and closing, disturb nobody.
    take.fetch(0, take.durationUs);
    take.fetch(0, take.durationUs);
    expect(rowsOf(take)).toHaveLength(rows);
    take.close();
  });

  it('opens, cut at any byte, with all whole batches, and says that its end is missing', async () => {
    const bytes = bytesOf(await written('to-cut'));
    const whole = opened(join(folder, 'to-cut.arrows'));
    fc.assert(
      fc.property(fc.integer({ min: 0, max: bytes.length - 1 }), (length) => {
        const file = fileOf('cut', bytes.subarray(0, length));
        const take = openTake(file);
        if (isTakeFault(take)) return ['TAKE_EMPTY', 'TAKE_FOREIGN'].includes(take.code);
        const rows = rowsOf(take);
        take.close();
        expect(rows.length % ROWS).toBe(0);
        expect(rows.length).toBe(take.rows);
        expect(take.lostBytes).not.toBeNull();
        // A batch is missing only when the cut went through it.
        const perBatch = (bytes.length - 8) / BATCHES;
        expect(rows.length / ROWS).toBeGreaterThanOrEqual(Math.floor(length / perBatch) - 2);
        return true;
      }),
      { numRuns: 60 },
    );
    whole.close();
  });

  it('does not take a cut between batches, or a tail of zeros, for an end', async () => {
    const bytes = bytesOf(await written('ends'));
    const between = openTake(fileOf('between', bytes.subarray(0, bytes.length - 8)));
    expect(isTakeFault(between) ? between : between.lostBytes).toBe(0);
    const zeros = openTake(fileOf('zeros', Buffer.concat([bytes.subarray(0, bytes.length - 8), Buffer.alloc(4096)])));
    expect(isTakeFault(zeros) ? zeros : [zeros.lostBytes, zeros.rows]).toEqual([4096, BATCHES * ROWS]);
  });

  it('survives any damage to its frames without throwing', async () => {
    const bytes = bytesOf(await written('to-damage'));
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 0, max: bytes.length - 1 }), fc.integer({ min: 0, max: 255 })), {
          minLength: 1,
          maxLength: 40,
        }),
        (damages) => {
          const damaged = Uint8Array.from(bytes);
          for (const [at, value] of damages) damaged[at] = value;
          const take = openTake(fileOf('damaged', damaged));
          if (isTakeFault(take)) return;
          const rows = rowsOf(take);
          expect(rows.length + take.damagedRows).toBe(take.rows);
          for (const row of rows) expect(Number.isSafeInteger(row.tUs) && row.event >= 0).toBe(true);
          take.close();
        },
      ),
      { numRuns: 100 },
    );
  });

  it('keeps every row where the clock jumped while it was recorded, and goes forward all the same', async () => {
    const jumps = fc.oneof(
      fc.integer({ min: -10_000_000, max: 10_000_000 }),
      fc.constantFrom(-(2 ** 40), 2 ** 40, Number.NaN),
    );
    await fc.assert(
      fc.asyncProperty(fc.array(jumps, { minLength: 1, maxLength: 40 }), fc.uuid(), async (steps, name) => {
        const writer = fileWriter(folder, `jumped-${name}`, headerOf(TWO_ARMS));
        let tUs = 1_000_000;
        for (const step of steps) {
          tUs = Number.isNaN(step) ? tUs : tUs + step;
          writer.row.tUs = Number.isNaN(step) ? step : tUs;
          for (const arm of writer.row.followers) {
            arm.commanded = 1;
            arm.speedRadS.fill(1);
          }
          writer.append();
          if (step % 3 === 0) writer.flush();
        }
        await writer.end();
        const take = opened(join(folder, `jumped-${name}.arrows`));
        const stamps = rowsOf(take).map((row) => row.tUs);
        expect([take.lostBytes, take.damagedRows, stamps.length]).toEqual([null, 0, steps.length]);
        expect(stamps).toEqual(stamps.toSorted((a, b) => a - b));
        // And whoever shows it is done with the years in between at once.
        const work = summarize(take);
        let step = work.next();
        while (step.done !== true) step = work.next();
        expect(step.value.rows).toBe(steps.length);
        take.close();
      }),
      { numRuns: 40 },
    );
  });

  it('whose stamps go back opens up to there, and says how much is left out', async () => {
    const writer = fileWriter(folder, 'forward', headerOf(TWO_ARMS));
    for (let i = 0; i < 90; i++) {
      writer.row.tUs = i * 10_000;
      writer.append();
      if (i % 30 === 29) writer.flush();
    }
    await writer.end();
    const bytes = bytesOf(join(folder, 'forward.arrows')).slice();
    // The stamp of row 60 stands first in the third batch's body: 600,000 us becomes 0.
    const stamp = Buffer.alloc(16);
    stamp.writeBigInt64LE(600_000n, 0);
    stamp.writeBigInt64LE(610_000n, 8);
    const at = Buffer.from(bytes).indexOf(stamp);
    expect(at).toBeGreaterThan(0);
    bytes.fill(0, at, at + 8);
    const take = opened(fileOf('backward', bytes));
    expect(rowsOf(take).map(({ tUs }) => tUs)).toEqual(Array.from({ length: 60 }, (_, i) => i * 10_000));
    expect(take.lostBytes).toBeGreaterThan(1_000);
    take.close();
  });

  it('refuses what is no take, with a code for each', async () => {
    expect(codeOf(join(folder, 'nowhere.arrows'))).toBe('TAKE_MISSING');
    expect(codeOf(fileOf('empty', ''))).toBe('TAKE_EMPTY');
    expect(codeOf(fileOf('text', 'angle,1\n'.repeat(400)))).toBe('TAKE_FOREIGN');
    expect(codeOf(fileOf('stream', tableToIPC(tableFromArrays({ a: Float64Array.of(1, 2) }), 'stream')))).toBe(
      'TAKE_FOREIGN',
    );
    mkdirSync(join(folder, 'folder.arrows'));
    expect(codeOf(join(folder, 'folder.arrows'))).toBe('TAKE_FOREIGN');
    const bytes = readFileSync(await written('future'));
    const at = bytes.indexOf('eidograph.take_version');
    const table = tableFromIPC(bytes);
    table.schema.metadata.set('eidograph.take_version', '2');
    expect(at).toBeGreaterThan(0);
    expect(codeOf(fileOf('newer', tableToIPC(table, 'stream')))).toBe('TAKE_NEWER');
  });

  it('reads the same in two other Arrow readers', async () => {
    const file = await written('others');
    const rows = rowsOf(opened(file));
    const arrow = tableFromIPC(readFileSync(file));
    const flechette = flechetteTable(readFileSync(file));
    expect(arrow.numRows).toBe(rows.length);
    expect(flechette.numRows).toBe(rows.length);
    for (const row of [0, 170, 399]) {
      const want = rows[row]?.followers[1]?.angleRad[1];
      expect(arrow.getChild('stork.elbow.angle_rad')?.get(row)).toBe(want);
      expect(flechette.getChild('stork.elbow.angle_rad').at(row)).toBe(want);
      expect(Number(arrow.getChild('t_us')?.get(row))).toBe(rows[row]?.tUs);
      expect(Number(flechette.getChild('t_us').at(row))).toBe(rows[row]?.tUs);
      expect(flechette.getChild('name').at(row)).toBe(rows[row]?.name);
    }
    expect(flechette.schema.metadata?.get('eidograph.take_version')).toBe('1');
  });
});
