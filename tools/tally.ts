import { relative } from 'node:path';

/** What one step of the test command found; `failed` and `skipped` name the tests. */
export interface Tally {
  readonly passed: number;
  readonly failed: readonly string[];
  readonly skipped: readonly string[];
}

/** The part of vitest's JSON report that the count rests on. */
export interface VitestReport {
  readonly testResults: readonly {
    readonly name: string;
    readonly status: string;
    readonly assertionResults: readonly { readonly fullName: string; readonly status: string }[];
  }[];
}

/**
 * Counts a run of vitest so that nothing broken can look green: a file that does not load, an error outside any test,
 * a run without a report and a run without a test each count as one failure.
 * @param report null when the run left none
 * @param exitCode of vitest
 */
export function tallyOfReport(step: string, report: VitestReport | null, exitCode: number, root: string): Tally {
  if (report === null) return failure(`${step}: ended without a report (exit status ${exitCode})`);
  let passed = 0;
  const failed: string[] = [];
  const skipped: string[] = [];
  for (const file of report.testResults) {
    const path = relative(root, file.name);
    const failedBefore = failed.length;
    for (const test of file.assertionResults) {
      if (test.status === 'passed') passed++;
      else if (test.status === 'failed') failed.push(`${path}: ${test.fullName}`);
      else skipped.push(`${path}: ${test.fullName}`);
    }
    if (file.status === 'failed' && failed.length === failedBefore) failed.push(`${path}: the file itself failed`);
  }
  if (failed.length === 0 && exitCode !== 0)
    failed.push(`${step}: an error outside its tests (exit status ${exitCode})`);
  if (failed.length === 0 && passed === 0) failed.push(`${step}: ran no test`);
  return { passed, failed, skipped };
}

/** A whole step counted as one. */
export function tallyOfCheck(step: string, exitCode: number): Tally {
  return exitCode === 0 ? { passed: 1, failed: [], skipped: [] } : failure(`${step} (exit status ${exitCode})`);
}

export function sum(tallies: readonly Tally[]): Tally {
  return {
    passed: tallies.reduce((total, tally) => total + tally.passed, 0),
    failed: tallies.flatMap((tally) => tally.failed),
    skipped: tallies.flatMap((tally) => tally.skipped),
  };
}

/** The last line of the test command; other programs read it. */
export function closingLine(tally: Tally): string {
  return `${tally.passed} passed, ${tally.failed.length} failed`;
}

function failure(name: string): Tally {
  return { passed: 0, failed: [name], skipped: [] };
}
