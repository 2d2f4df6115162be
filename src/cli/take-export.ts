import { resolve } from 'node:path';
import { outputFile } from '../take/disk.ts';
import { type ExportFormat, exportTakes } from '../take/export.ts';
import { withTakes } from './take-files.ts';
import { refusedStatus, worked } from './take-work.ts';
import type { TakeWorld } from './take-world.ts';

export interface ExportCommand {
  readonly takes: string | undefined;
  /** undefined: standard output. */
  readonly out: string | undefined;
  readonly format: ExportFormat | undefined;
  readonly columns: readonly string[];
  readonly rate: number | undefined;
}

/** Writes takes as one table, whole or not at all. */
export function exportCommand(names: readonly string[], options: ExportCommand, world: TakeWorld): Promise<number> {
  const { out, columns } = options;
  const format = options.format ?? formatOf(out);
  return withTakes(world, options.takes, names, async (takes) => {
    const settings = { format, columns, rateHz: options.rate ?? null };
    if (out === undefined) {
      const exported = await worked(
        exportTakes(takes, settings, (bytes) => void world.out.write(bytes)),
        world,
      );
      return 'status' in exported ? exported.status : 0;
    }
    const file = resolve(out);
    const whole = outputFile(file, out);
    if ('code' in whole) return refusedStatus(whole, world.err);
    try {
      const exported = await worked(exportTakes(takes, settings, whole.write), world);
      if ('status' in exported) return exported.status;
      const fault = whole.keep();
      if (fault !== null) return refusedStatus(fault, world.err);
      world.err.write(`${out}: ${exported.done.rows} rows, ${exported.done.columns} columns\n`);
      return 0;
    } finally {
      whole.drop();
    }
  });
}

function formatOf(out: string | undefined): ExportFormat {
  if (out?.endsWith('.parquet') === true) return 'parquet';
  return out?.endsWith('.jsonl') === true || out?.endsWith('.ndjson') === true ? 'jsonl' : 'csv';
}
