// Counts for the last line of npm test: how many tests passed, and how many things failed, into the file that REFETTLE_TEST_COUNT names.
import { writeFileSync } from 'node:fs';
import type { Reporter, TestModule } from 'vitest/node';

export class CountReporter implements Reporter {
  onTestRunEnd(modules: readonly TestModule[], unhandledErrors: readonly unknown[]): void {
    const file = process.env.REFETTLE_TEST_COUNT;
    if (file) writeFileSync(file, `${Object.values(count(modules, unhandledErrors.length)).join(' ')}\n`);
  }
}

function count(modules: readonly TestModule[], unhandled: number): { passed: number; failed: number } {
  const tests = modules.flatMap((module) => [...module.children.allTests()]);
  const passed = tests.filter((each) => each.result().state === 'passed').length;
  const failedTests = tests.filter((each) => each.result().state === 'failed').length;
  // A file that does not load and a beforeAll that throws have no failed test.
  const suites = modules.flatMap((module) => [module, ...module.children.allSuites()]);
  const failedSuites = suites.filter((suite) => suite.errors().length > 0).length;
  const failed = failedTests + failedSuites + unhandled;
  const ranNothing = passed === 0 && failed === 0;
  return { passed, failed: ranNothing ? 1 : failed };
}

// Vitest wants the reporter of a file as its default export.
export { CountReporter as default };
