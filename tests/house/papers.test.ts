import { existsSync, readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { FAULTS } from '../../src/bridge/words.ts';
import { FIT_CODES } from '../../src/fit/problems.ts';
import { TAKE_REMEDIES } from '../../src/take/fault.ts';
import { MISTAKE_CODES } from '../../src/rig/mistake-codes.ts';
import { ROOT } from './planted.ts';

const read = (name: string): string => readFileSync(join(ROOT, name), 'utf8');
const found = (text: string, pattern: RegExp): string[] => [
  ...new Set([...text.matchAll(pattern)].map((match) => match[1] as string)),
];

describe('README', () => {
  it('lists every code of a mistake, of a port fault and of a take, and none that is gone', () => {
    const codes = [
      ...Object.keys(MISTAKE_CODES),
      ...Object.keys(FAULTS),
      ...Object.keys(TAKE_REMEDIES),
      ...Object.keys(FIT_CODES),
    ];
    expect(found(read('README.md'), /`((?:RIG|PORT|TAKE|FIT)_[A-Z_]+)`/g).sort()).toEqual(codes.sort());
  });
});

describe('DEVELOPERS', () => {
  it('names every room, in the order in which they may import', () => {
    const require = createRequire(import.meta.url);
    const { forbidden } = require(join(ROOT, '.dependency-cruiser.cjs')) as { forbidden: { name: string }[] };
    const rows = forbidden.flatMap(({ name }) => /^(\w+)-imports-only-rooms-above$/.exec(name)?.[1] ?? []);
    const table = read('DEVELOPERS.md').match(/^\| `clock\/`[^]*?^\| `index\.ts`/m)?.[0] ?? '';
    // The last room may import them all and so has no rule.
    expect(found(table, /`(\w+)\/`/g)).toEqual([...rows, 'cli']);
  });
});

it.each(['README.md', 'DEVELOPERS.md'])('every script that %s names is there', (paper) => {
  const { scripts } = JSON.parse(read('package.json')) as { scripts: Record<string, string> };
  const named = found(read(paper), /npm run ([\w:]+)/g);
  expect(named.length).toBeGreaterThan(0);
  expect(named.filter((name) => !(name in scripts))).toEqual([]);
});

it.each(['README.md', 'DEVELOPERS.md'])('every file that %s names by its path is there', (paper) => {
  const named = found(read(paper), /[`(]((?:src|tests|tools|profiles)\/[\w./-]*\w)[`)]/g);
  expect(named.length).toBeGreaterThan(0);
  expect(named.filter((path) => !existsSync(join(ROOT, path)))).toEqual([]);
});
