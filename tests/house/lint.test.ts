import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { plant, ROOT } from './planted.ts';

/** A whole program is started, on a machine that may be busy. */
const LIMIT_MS = 60_000;

const PLANTED: readonly { rule: string; path: string; text: string }[] = [
  {
    rule: 'typescript(no-floating-promises)',
    path: 'src/bridge/floating.ts',
    text: 'export function go(later: () => Promise<void>): void {\n  later();\n}\n',
  },
  {
    rule: 'typescript(no-misused-promises)',
    path: 'src/bridge/misused.ts',
    text: 'export function go(each: readonly number[]): void {\n  each.forEach(async () => {});\n}\n',
  },
  {
    rule: 'typescript(switch-exhaustiveness-check)',
    path: 'src/follower/forgotten.ts',
    text: "export function row(state: 'holding' | 'limp'): void {\n  switch (state) {\n    case 'limp':\n  }\n}\n",
  },
  { rule: 'eslint(no-restricted-globals)', path: 'src/sim/timer.ts', text: 'setTimeout(() => {}, 1);\n' },
  { rule: 'eslint(no-restricted-globals)', path: 'src/drive/date.ts', text: 'export const now = Date.now();\n' },
  {
    rule: 'eslint(no-restricted-properties)',
    path: 'src/sim/chance.ts',
    text: 'export const chance = Math.random();\n',
  },
  {
    rule: 'eslint(no-restricted-imports)',
    path: 'src/bridge/chance.ts',
    text: "import { randomInt } from 'node:crypto';\nexport const chance = randomInt(6);\n",
  },
  {
    rule: 'vitest(expect-expect)',
    path: 'tests/map/empty.test.ts',
    text: "import { it } from 'vitest';\nit('asserts nothing', () => {});\n",
  },
  {
    rule: 'vitest(no-focused-tests)',
    path: 'tests/map/focused.test.ts',
    text: "import { expect, it } from 'vitest';\nit.only('hides the others', () => expect(1).toBe(1));\n",
  },
];

describe('the lint', { timeout: LIMIT_MS }, () => {
  const tree = plant({
    '.oxlintrc.json': readFileSync(join(ROOT, '.oxlintrc.json'), 'utf8'),
    'tsconfig.json': readFileSync(join(ROOT, 'tsconfig.json'), 'utf8'),
    'src/clock/timer.ts': 'setTimeout(() => {}, 1);\n',
    ...Object.fromEntries(PLANTED.map(({ path, text }) => [path, text])),
  });
  afterAll(() => tree.remove());
  const oxlint = join(ROOT, 'node_modules', 'oxlint', 'bin', 'oxlint');
  const run = spawnSync(process.execPath, [oxlint, '--type-aware', '--format', 'json'], {
    cwd: tree.folder,
    encoding: 'utf8',
  });
  const { diagnostics } = JSON.parse(run.stdout) as { diagnostics: readonly { code: string; filename: string }[] };

  it.each(PLANTED)('reports $rule planted in $path', ({ rule, path }) => {
    expect(diagnostics.filter(({ filename }) => filename === path).map(({ code }) => code)).toEqual([rule]);
  });

  it('lets the clock have its timers', () => {
    expect(diagnostics.filter(({ filename }) => filename === 'src/clock/timer.ts')).toEqual([]);
  });

  it('ends with a failing status', () => {
    expect(run.status).toBe(1);
  });
});
