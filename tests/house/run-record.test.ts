import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import type { RunRecord } from '../../tools/tally.ts';
import { plant, ROOT } from './planted.ts';

/** A whole program is started, on a machine that may be busy. */
const LIMIT_MS = 60_000;

/** One file for each way in which a run can be less than green. */
const FILES: Readonly<Record<string, string>> = {
  'a.test.ts': `import { expect, it } from 'vitest';
it('passes', () => expect(1).toBe(1));
it('fails', () => expect(1).toBe(2));
it('skips', (context) => context.skip('no board here'));
`,
  'b.test.ts': "import './not-there.ts';\n",
  'c.test.ts': `import { beforeAll, describe, expect, it } from 'vitest';
describe('a group', () => {
  beforeAll(() => { throw new Error('no set-up'); });
  it('is never reached', () => expect(1).toBe(1));
});
`,
  'd.test.ts': `import { expect, it } from 'vitest';
it('loses a promise', () => {
  void Promise.reject(new Error('lost promise'));
  expect(1).toBe(1);
});
`,
};

describe('the record of a run', { timeout: LIMIT_MS }, () => {
  const tree = plant(FILES);
  afterAll(() => tree.remove());

  it('holds every way in which a run can be less than green', () => {
    const path = join(tree.folder, 'record.json');
    const vitest = join(ROOT, 'node_modules', 'vitest', 'vitest.mjs');
    const recorder = join(ROOT, 'tools', 'run-record.ts');
    const run = spawnSync(process.execPath, [vitest, 'run', '--root', tree.folder, `--reporter=${recorder}`], {
      cwd: tree.folder,
      env: { ...process.env, EIDOGRAPH_RECORD: path },
    });
    expect(run.status).toBe(1);
    const record = JSON.parse(readFileSync(path, 'utf8')) as RunRecord;
    const byName = [...record.tests].sort((a, b) => a.name.localeCompare(b.name));
    expect(byName).toEqual([
      { name: 'a.test.ts: fails', state: 'failed', note: '' },
      { name: 'a.test.ts: passes', state: 'passed', note: '' },
      { name: 'a.test.ts: skips', state: 'skipped', note: 'no board here' },
      { name: 'c.test.ts: a group > is never reached', state: 'skipped', note: '' },
      { name: 'd.test.ts: loses a promise', state: 'passed', note: '' },
    ]);
    expect(record.brokenFiles).toEqual(['b.test.ts']);
    expect(record.brokenSuites).toEqual(['c.test.ts: a group']);
    expect(record.strayErrors).toEqual(['lost promise']);
  });
});
