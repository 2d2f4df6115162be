import { describe, expect, it } from 'vitest';
import { closingLine, sum, tallyOfCheck, tallyOfReport, type VitestReport } from '../../tools/tally.ts';

function report(...files: [name: string, status: string, tests: [name: string, status: string][]][]): VitestReport {
  return {
    testResults: files.map(([name, status, tests]) => ({
      name: `/root/${name}`,
      status,
      assertionResults: tests.map(([fullName, testStatus]) => ({ fullName, status: testStatus })),
    })),
  };
}

describe('the count of the test command', () => {
  it('counts tests by their status and names those that did not pass', () => {
    const mixed = report(
      [
        'a.test.ts',
        'failed',
        [
          ['one', 'passed'],
          ['two', 'failed'],
          ['three', 'skipped'],
        ],
      ],
      [
        'b.test.ts',
        'passed',
        [
          ['four', 'passed'],
          ['five', 'todo'],
        ],
      ],
    );
    expect(tallyOfReport('rooms', mixed, 1, '/root')).toEqual({
      passed: 2,
      failed: ['a.test.ts: two'],
      skipped: ['a.test.ts: three', 'b.test.ts: five'],
    });
  });

  it('counts a file that did not load as one failure', () => {
    const broken = report(['a.test.ts', 'failed', []], ['b.test.ts', 'passed', [['one', 'passed']]]);
    expect(tallyOfReport('rooms', broken, 1, '/root').failed).toEqual(['a.test.ts: the file itself failed']);
  });

  it('counts an error outside all tests as one failure', () => {
    const green = report(['a.test.ts', 'passed', [['one', 'passed']]]);
    expect(tallyOfReport('rooms', green, 0, '/root').failed).toEqual([]);
    expect(tallyOfReport('rooms', green, 1, '/root').failed).toHaveLength(1);
  });

  it('counts a run that left no report, or ran no test, as one failure', () => {
    expect(tallyOfReport('rooms', null, 0, '/root').failed).toHaveLength(1);
    expect(tallyOfReport('rooms', report(), 0, '/root').failed).toEqual(['rooms: ran no test']);
    const allSkipped = report(['a.test.ts', 'passed', [['one', 'skipped']]]);
    expect(tallyOfReport('smoke', allSkipped, 0, '/root').failed).toEqual(['smoke: ran no test']);
  });

  it('adds steps up to one closing line', () => {
    const green = tallyOfReport(
      'rooms',
      report([
        'a.test.ts',
        'passed',
        [
          ['one', 'passed'],
          ['two', 'passed'],
        ],
      ]),
      0,
      '/root',
    );
    expect(closingLine(sum([tallyOfCheck('types', 0), tallyOfCheck('lint', 2), green]))).toBe('3 passed, 1 failed');
  });
});
