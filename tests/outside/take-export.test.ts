import { join } from 'node:path';
import { DuckDBInstance } from '@duckdb/node-api';
import { parquetReadObjects } from 'hyparquet';
import { readFileSync, writeFileSync } from 'node:fs';
import { beforeAll, describe, expect, it } from 'vitest';
import { type ExportFormat, exportTakes } from '../../src/take/export.ts';
import { isTakeFault } from '../../src/take/fault.ts';
import type { Take } from '../../src/take/reader.ts';
import type { Row } from '../../src/take/row.ts';
import { filmed, opened, rowsOf, takesFolderForTests } from '../take/studio.ts';

const folder = takesFolderForTests();
const DEG = 180 / Math.PI;
let take: Take;
let rows: Row[];

beforeAll(async () => {
  for (const name of ['one', 'two']) {
    const { performance, recorder } = filmed(folder, name);
    performance.run(2_500_000);
    recorder.mark(name === 'one' ? 'a "quoted", name' : '');
    performance.live.key('mark');
    performance.run(name === 'one' ? 1_000_000 : 2_000_000);
    await recorder.end();
  }
  take = opened(join(folder, 'one.arrows'));
  rows = rowsOf(take);
});

function exported(
  format: ExportFormat,
  takes: readonly Take[],
  columns: readonly string[] = [],
  rateHz: number | null = null,
): string {
  const file = join(folder, `${takes.length}-${columns.length}-${rateHz}.${format}`);
  const pieces: Uint8Array[] = [];
  const work = exportTakes(takes, { format, columns, rateHz }, (bytes) => pieces.push(bytes));
  let step = work.next();
  while (step.done !== true) step = work.next();
  if (isTakeFault(step.value)) throw new Error(step.value.detail);
  writeFileSync(file, Buffer.concat(pieces));
  return file;
}

async function ask(sql: string): Promise<Record<string, unknown>[]> {
  const instance = await DuckDBInstance.create(':memory:');
  const connection = await instance.connect();
  const answer = (await connection.runAndReadAll(sql)).getRowObjects();
  connection.closeSync();
  return answer as Record<string, unknown>[];
}

function sum(of: (row: Row) => number): number {
  return rows.reduce((total, row) => total + (Number.isNaN(of(row)) ? 0 : of(row)), 0);
}

const QUESTIONS = `count(*) AS n, sum(t_us)::DOUBLE AS t, count(*) FILTER (WHERE event = 'reading') AS readings,
  sum("leader.base.counts")::DOUBLE AS counts, count("leader.base.counts") AS counted,
  sum("leader.elbow.pose_deg")::DOUBLE AS pose, sum("stork.elbow.angle_deg")::DOUBLE AS angle,
  sum("wren.commanded")::DOUBLE AS commands, count(*) FILTER (WHERE "wren.state" = 'following') AS following,
  max(name) AS name`;

describe('exports, read by DuckDB', () => {
  it.each([
    ['csv', (file: string) => `read_csv('${file}', header = true, nullstr = '')`],
    ['parquet', (file: string) => `read_parquet('${file}')`],
    ['jsonl', (file: string) => `read_json('${file}', format = 'newline_delimited')`],
  ] as const)('%s has the counts, sums and words of the take', async (format, table) => {
    const [found] = await ask(`SELECT ${QUESTIONS} FROM ${table(exported(format, [take]))}`);
    const readings = rows.filter(({ event }) => event === 0);
    expect(Number(found?.['n'])).toBe(rows.length);
    expect(found?.['t']).toBe(sum((row) => row.tUs));
    expect(Number(found?.['readings'])).toBe(readings.length);
    expect(Number(found?.['counted'])).toBe(readings.length);
    expect(found?.['counts']).toBe(sum((row) => row.counts[0] ?? 0));
    // Six decimals in CSV: half a millionth a row at most.
    expect(found?.['pose']).toBeCloseTo(
      sum((row) => (row.poseRad[1] ?? 0) * DEG),
      2,
    );
    expect(found?.['angle']).toBeCloseTo(
      sum((row) => (row.followers[1]?.angleRad[1] ?? 0) * DEG),
      2,
    );
    expect(found?.['commands']).toBe(sum((row) => row.followers[0]?.commanded ?? 0));
    expect(Number(found?.['following'])).toBe(rows.filter(({ followers }) => followers[0]?.state === 3).length);
    expect(found?.['name']).toBe('a "quoted", name');
  });

  it('has the same types in both', async () => {
    const columns = ['t_us', 'event', 'wren.base.angle_deg', 'leader.*'];
    const typesOf = async (table: string): Promise<unknown[][]> => {
      const described = await ask(`DESCRIBE SELECT * FROM ${table}`);
      return described.map((column) => [column['column_name'], column['column_type']]);
    };
    const parquet = await typesOf(`read_parquet('${exported('parquet', [take], columns)}')`);
    expect(parquet).toEqual([
      ['t_us', 'BIGINT'],
      ['event', 'VARCHAR'],
      ['leader.base.counts', 'DOUBLE'],
      ['leader.elbow.counts', 'DOUBLE'],
      ['leader.base.pose_deg', 'DOUBLE'],
      ['leader.elbow.pose_deg', 'DOUBLE'],
      ['wren.base.angle_deg', 'DOUBLE'],
    ]);
    const csv = await typesOf(`read_csv('${exported('csv', [take], columns)}', header = true)`);
    // Counts are whole here, and CSV has no types of its own.
    expect(csv.map(([name, type]) => [name, name !== 't_us' && type === 'BIGINT' ? 'DOUBLE' : type])).toEqual(parquet);
  });

  it('has each number to within half a millionth in CSV, and bit for bit in Parquet', async () => {
    const column = '"stork.base.angle_deg"';
    const csv = exported('csv', [take]);
    const parquet = exported('parquet', [take]);
    const [apart] = await ask(`SELECT max(abs(c.${column} - p.${column})) AS apart FROM
      (SELECT row_number() OVER () AS i, * FROM read_csv('${csv}', header = true)) c JOIN
      (SELECT row_number() OVER () AS i, * FROM read_parquet('${parquet}')) p USING (i)`);
    expect(apart?.['apart']).toBeLessThanOrEqual(0.5000001e-6);
    const exact = await ask(`SELECT ${column} AS a FROM read_parquet('${parquet}')`);
    expect(exact.map(({ a }) => a)).toEqual(rows.map(({ followers }) => (followers[1]?.angleRad[0] ?? 0) * DEG));
  });

  it('puts many takes into one table with a take column, at a chosen rate', async () => {
    const other = opened(join(folder, 'two.arrows'));
    const file = exported('parquet', [take, other], ['t_us', '*.angle_deg'], 100);
    const found = await ask(
      `SELECT take, count(*) AS n, max(t_us) AS t FROM read_parquet('${file}') GROUP BY take ORDER BY take`,
    );
    expect(found.map(({ take: name, n, t }) => [name, Number(n), Number(t)])).toEqual(
      [take, other].map(({ name, durationUs }) => [
        name,
        Math.floor(durationUs / 10_000) + 1,
        Math.floor(durationUs / 10_000) * 10_000,
      ]),
    );
  });
});

describe('the Parquet export', () => {
  it('reads the same with hyparquet', async () => {
    const bytes = readFileSync(exported('parquet', [take], ['t_us', 'wren.state', 'wren.elbow.angle_deg']));
    const buffer = bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength);
    const read = await parquetReadObjects({ file: buffer as ArrayBuffer });
    expect(read).toHaveLength(rows.length);
    expect(read.at(-1)).toEqual({
      t_us: BigInt(rows.at(-1)?.tUs ?? -1),
      'wren.state': 'following',
      'wren.elbow.angle_deg': (rows.at(-1)?.followers[0]?.angleRad[1] ?? Number.NaN) * DEG,
    });
  });
});
