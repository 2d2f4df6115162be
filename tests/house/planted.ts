import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join, resolve } from 'node:path';

export const ROOT = resolve(import.meta.dirname, '..', '..');

/** A small source tree outside the project, with the project's packages in reach, in which faults are planted. */
export interface PlantedTree {
  readonly folder: string;
  remove(): void;
}

/** @param files path inside the tree to text */
export function plant(files: Readonly<Record<string, string>>): PlantedTree {
  const folder = mkdtempSync(join(tmpdir(), 'eidograph-planted-'));
  symlinkSync(join(ROOT, 'node_modules'), join(folder, 'node_modules'));
  for (const [path, text] of Object.entries(files)) {
    mkdirSync(dirname(join(folder, path)), { recursive: true });
    writeFileSync(join(folder, path), text);
  }
  return { folder, remove: () => rmSync(folder, { recursive: true }) };
}
