import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';

const LAW = /^import .*'fast-check'/m;
const RELATIVE_IMPORT = /\bfrom '(\.[^']+)'/g;

/**
 * The test files below `folder` that state laws, themselves or through a file beside them that they import: the ones
 * for which another seed is another test.
 */
export function lawTests(folder: string): readonly string[] {
  const importsOf = new Map<string, readonly string[]>();
  const lawful = new Set<string>();
  for (const name of readdirSync(folder, { recursive: true, encoding: 'utf8' })) {
    if (!name.endsWith('.ts')) continue;
    const path = join(folder, name);
    const text = readFileSync(path, 'utf8');
    importsOf.set(
      path,
      [...text.matchAll(RELATIVE_IMPORT)].map((match) => resolve(dirname(path), match[1] as string)),
    );
    if (LAW.test(text)) lawful.add(path);
  }
  for (let before = -1; before < lawful.size; ) {
    before = lawful.size;
    for (const [path, imports] of importsOf) if (imports.some((imported) => lawful.has(imported))) lawful.add(path);
  }
  return [...lawful]
    .filter((path) => path.endsWith('.test.ts'))
    .map((path) => relative(folder, path))
    .sort();
}
