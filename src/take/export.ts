import type { Work } from './derive.ts';
import { diskFault, takeFault, type TakeFault } from './fault.ts';
import { csvSheet } from './csv.ts';
import { jsonSheet } from './json-sheet.ts';
import { parquetSheet } from './parquet.ts';
import type { Take } from './reader.ts';
import { resampled } from './resample.ts';
import type { MakeSheet, Write } from './sheet.ts';
import { chosenColumns, type TableColumn } from './table.ts';

export const EXPORT_FORMATS = ['csv', 'jsonl', 'parquet'] as const;
export type ExportFormat = (typeof EXPORT_FORMATS)[number];

export interface Exported {
  readonly rows: number;
  readonly columns: number;
  readonly takes: number;
}

export interface ExportOptions {
  readonly format: ExportFormat;
  /** Patterns; none: every column. */
  readonly columns: readonly string[];
  /** null: every event, as it came. */
  readonly rateHz: number | null;
}

const SHEETS: Readonly<Record<ExportFormat, MakeSheet>> = { csv: csvSheet, jsonl: jsonSheet, parquet: parquetSheet };
const ROWS_A_STEP = 2_000;

/** Writes takes into one table. Takes that share it must have the same columns, because a row has only one meaning. */
export function* exportTakes(takes: readonly Take[], options: ExportOptions, write: Write): Work<Exported> {
  const [first] = takes;
  if (first === undefined) throw new TypeError('nothing to export');
  const columns = chosenColumns(first, options.columns);
  if ('code' in columns) return columns;
  const strange = takes.map((take) => differs(take, columns, options.columns)).find((fault) => fault !== null);
  if (strange !== undefined && strange !== null) return strange;
  const total = takes.reduce((sum, take) => sum + expectedRows(take, options.rateHz), 0);
  const sheet = SHEETS[options.format](columns, takes.length > 1, write);
  let rows = 0;
  try {
    for (const take of takes) {
      for (const row of options.rateHz === null ? take.readFrom(0) : resampled(take, options.rateHz)) {
        sheet.add(take.name, row);
        rows++;
        if (rows % ROWS_A_STEP === 0) yield Math.min(1, rows / total);
      }
    }
    sheet.end();
  } catch (error) {
    if (error instanceof Error && 'syscall' in error) return diskFault(first.name, error);
    throw error;
  }
  return { rows, columns: columns.length + (takes.length > 1 ? 1 : 0), takes: takes.length };
}

function expectedRows(take: Take, rateHz: number | null): number {
  return rateHz === null ? take.rows : (take.durationUs / 1e6) * rateHz + 1;
}

function differs(take: Take, wanted: readonly TableColumn[], patterns: readonly string[]): TakeFault | null {
  const columns = chosenColumns(take, patterns);
  if ('code' in columns) return columns;
  const at = wanted.findIndex(({ name }, i) => columns[i]?.name !== name);
  if (at < 0 && columns.length === wanted.length) return null;
  return takeFault('TAKE_UNFIT', take.name, `its columns differ, at ${(wanted[at] ?? columns[wanted.length])?.name}`);
}
