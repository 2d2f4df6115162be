import { describe, expect, it } from 'vitest';
import { closingLine, type RunRecord, sum, tallyOfCheck, tallyOfRun } from '../../tools/tally.ts';

const EMPTY: RunRecord = { tests: [], brokenFiles: [], brokenSuites: [], strayErrors: [] };
const GREEN: RunRecord = { ...EMPTY, tests: [{ name: 'a: one', state: 'passed', note: '' }] };

describe('the count of the test command', () => {
  it('counts tests by their state and names those that did not pass, with the reason of a skip', () => {
    const mixed: RunRecord = {
      ...EMPTY,
      tests: [
        { name: 'a: one', state: 'passed', note: '' },
        { name: 'a: two', state: 'failed', note: '' },
        { name: 'b: three', state: 'skipped', note: 'no socat' },
        { name: 'b: four', state: 'skipped', note: '' },
        { name: 'b: five', state: 'passed', note: '' },
      ],
    };
    expect(tallyOfRun('rooms', mixed, 1)).toEqual({
      passed: 2,
      failed: ['a: two'],
      skipped: ['b: three (no socat)', 'b: four'],
    });
  });

  it('is green for a run in which all passed', () => {
    expect(tallyOfRun('rooms', GREEN, 0)).toEqual({ passed: 1, failed: [], skipped: [] });
  });

  it.each<[string, RunRecord | null, number]>([
    ['a file that did not load', { ...GREEN, brokenFiles: ['b.test.ts'] }, 1],
    ['a set-up that failed', { ...GREEN, brokenSuites: ['b.test.ts: group'] }, 1],
    ['an error outside every test', { ...GREEN, strayErrors: ['lost promise'] }, 1],
    ['a test that never ended', { ...GREEN, tests: [{ name: 'a: one', state: 'pending', note: '' }] }, 1],
    ['a failing exit status that nothing explains', GREEN, 1],
    ['a run that left no record', null, 0],
    ['a run without a test', EMPTY, 0],
    ['a run of skipped tests only', { ...EMPTY, tests: [{ name: 'a: one', state: 'skipped', note: '' }] }, 0],
  ])('counts %s as one failure', (_what, record, exitCode) => {
    expect(tallyOfRun('rooms', record, exitCode).failed).toHaveLength(1);
  });

  it('adds steps up to one closing line', () => {
    const steps = [tallyOfCheck('types', 0), tallyOfCheck('lint', 2), tallyOfRun('rooms', GREEN, 0)];
    expect(closingLine(sum(steps))).toBe('2 passed, 1 failed');
  });
});
