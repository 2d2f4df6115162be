import { writeFileSync } from 'node:fs';
import type { Reporter, SerializedError, TestModule } from 'vitest/node';
import type { RunRecord } from './tally.ts';

/**
 * A vitest reporter that writes down what the test command counts, to the file named by EIDOGRAPH_RECORD. Vitest's own
 * JSON report leaves out why a test was skipped and which errors happened outside all tests.
 */
export default class RunRecorder implements Reporter {
  onTestRunEnd(modules: readonly TestModule[], errors: readonly SerializedError[]): void {
    const path = process.env.EIDOGRAPH_RECORD;
    if (path === undefined) throw new Error('EIDOGRAPH_RECORD names no file for the record of the run');
    const record: RunRecord = {
      tests: modules.flatMap((module) =>
        [...module.children.allTests()].map((test) => {
          const result = test.result();
          const note = result.state === 'skipped' ? (result.note ?? '') : '';
          return { name: `${module.relativeModuleId}: ${test.fullName}`, state: result.state, note };
        }),
      ),
      brokenFiles: modules.filter((module) => module.errors().length > 0).map((module) => module.relativeModuleId),
      brokenSuites: modules.flatMap((module) =>
        [...module.children.allSuites()]
          .filter((suite) => suite.errors().length > 0)
          .map((suite) => `${module.relativeModuleId}: ${suite.fullName}`),
      ),
      strayErrors: errors.map((error) => error.message),
    };
    writeFileSync(path, JSON.stringify(record));
  }
}
