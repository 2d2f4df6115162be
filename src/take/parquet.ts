import { ByteWriter, ParquetWriter } from 'hyparquet-writer';
import type { MakeSheet } from './sheet.ts';
import type { TableColumn } from './table.ts';

/** Rows in memory at once: the table's own row groups. */
const GROUP_ROWS = 8_192;

type Cells = (bigint | number | string | null)[];

/** Parquet with Snappy: whole numbers as INT64, others as DOUBLE, text as UTF-8; null where nothing is known. */
export const parquetSheet: MakeSheet = (columns, withTake, write) => {
  const bytes = new ByteWriter();
  const all = [...(withTake ? ['take'] : []), ...columns.map(({ name }) => name)];
  const file = new ParquetWriter({
    writer: bytes,
    createdBy: 'eidograph',
    schema: [
      { name: 'root', num_children: all.length },
      ...(withTake ? [{ name: 'take', ...TEXT }] : []),
      ...columns.map((column) => ({ name: column.name, ...typeOf(column) })),
    ],
  });
  let cells: Cells[] = all.map(() => []);

  const leave = (): void => {
    write(bytes.getBytes().slice());
    bytes.index = 0;
  };

  const group = (): void => {
    const columnData = all.map((name, i) => ({ name, data: cells[i] as Cells }));
    // Nothing waits: the writer has no `flush` of its own that could.
    void file.write({ columnData, rowGroupSize: GROUP_ROWS });
    cells = all.map(() => []);
    leave();
  };

  return {
    add(take, row) {
      if (withTake) cells[0]?.push(take);
      const first = withTake ? 1 : 0;
      for (let i = 0; i < columns.length; i++) cells[i + first]?.push(valueOf(columns[i] as TableColumn, row));
      if (cells[0]?.length === GROUP_ROWS) group();
    },
    end() {
      if ((cells[0]?.length ?? 0) > 0) group();
      void file.finish();
      leave();
    },
  };
};

const TEXT = { type: 'BYTE_ARRAY', converted_type: 'UTF8', repetition_type: 'REQUIRED' } as const;

function typeOf({ kind }: TableColumn): object {
  if (kind === 'text') return TEXT;
  return kind === 'integer'
    ? { type: 'INT64', repetition_type: 'REQUIRED' }
    : { type: 'DOUBLE', repetition_type: 'OPTIONAL' };
}

function valueOf(column: TableColumn, row: Parameters<TableColumn['of']>[0]): bigint | number | string | null {
  const value = column.of(row);
  if (typeof value === 'string') return value;
  if (column.kind === 'integer') return BigInt(value);
  return Number.isNaN(value) ? null : value;
}
