import type { PointMap } from './points.ts';
import { readTable, ROW } from './table.ts';

/** Many maps in one table, end to end: read at every command, they share the processor's cache instead of filling it. */
export interface PackedMaps {
  /** output[j] = map k of input[i]. */
  apply(k: number, input: Float64Array, i: number, output: Float64Array, j: number): void;
}

export function packMaps(maps: readonly PointMap[]): PackedMaps {
  const first = new Uint32Array(maps.length + 1);
  maps.forEach(({ table }, k) => (first[k + 1] = (first[k] as number) + table.length));
  const packed = new Float64Array(first[maps.length] as number);
  maps.forEach(({ table }, k) => packed.set(table, first[k]));
  return {
    apply(k, input, i, output, j) {
      readTable(packed, first[k] as number, (first[k + 1] as number) - ROW, input, i, output, j);
    },
  };
}
