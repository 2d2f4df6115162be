/** What one step of the test command found; `failed` and `skipped` name the tests. */
export interface Tally {
  readonly passed: number;
  readonly failed: readonly string[];
  readonly skipped: readonly string[];
}

/** One run of vitest, as `run-record.ts` writes it down. */
export interface RunRecord {
  readonly tests: readonly {
    readonly name: string;
    readonly state: 'passed' | 'failed' | 'skipped' | 'pending';
    /** Why it was skipped, or empty. */
    readonly note: string;
  }[];
  /** Files that did not load. */
  readonly brokenFiles: readonly string[];
  /** Groups of tests whose set-up or clearing-up failed. */
  readonly brokenSuites: readonly string[];
  /** What was thrown outside every test. */
  readonly strayErrors: readonly string[];
}

/**
 * Counts a run of vitest so that nothing broken can look green: a file that does not load, a set-up that fails, an
 * error outside any test, a run without a record and a run without a test each count as one failure.
 * @param record null when the run left none
 * @param exitCode of vitest
 */
export function tallyOfRun(step: string, record: RunRecord | null, exitCode: number): Tally {
  if (record === null) return failure(`${step}: ended without a record (exit status ${exitCode})`);
  const named = (state: string) => record.tests.filter((test) => test.state === state);
  const failed = [
    ...named('failed').map(({ name }) => name),
    ...named('pending').map(({ name }) => `${name}: never ended`),
    ...record.brokenFiles.map((name) => `${name}: did not load`),
    ...record.brokenSuites.map((name) => `${name}: set-up or clearing-up failed`),
    ...record.strayErrors.map((message) => `${step}: outside every test: ${message}`),
  ];
  const passed = named('passed').length;
  if (failed.length === 0 && exitCode !== 0) failed.push(`${step}: exit status ${exitCode}`);
  if (failed.length === 0 && passed === 0) failed.push(`${step}: ran no test`);
  const skipped = named('skipped').map(({ name, note }) => (note === '' ? name : `${name} (${note})`));
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
