import type { Row } from './row.ts';
import type { TableColumn } from './table.ts';

/** Rows become bytes of a format; what is ready is written as it comes. */
export interface Sheet {
  /** @param columns of this row's take; other takes may have them in another order, or lack some */
  add(take: string, row: Row): void;
  end(): void;
}

/** Makes a sheet of these columns, `take` first where several takes share it. */
export type MakeSheet = (columns: readonly TableColumn[], withTake: boolean, write: Write) => Sheet;

export type Write = (bytes: Uint8Array) => void;
