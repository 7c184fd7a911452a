/**
 * Counts the tests of a run. Under `npm test` the counts go to the file that scripts/test.mjs names, which
 * prints them last; in a vitest started by hand they are printed here.
 */
import { writeFileSync } from 'node:fs';

export default class CountReporter {
  /**
   * @param {ReadonlyArray<import('vitest/node').TestModule>} modules
   * @param {ReadonlyArray<unknown>} unhandledErrors
   */
  onTestRunEnd(modules, unhandledErrors) {
    const counts = { passed: 0, failed: unhandledErrors.length, skipped: 0 };
    for (const module of modules) {
      // A file, or a group in it, that breaks outside any test.
      counts.failed += module.errors().length;
      for (const suite of module.children.allSuites()) counts.failed += suite.errors().length;
      for (const test of module.children.allTests()) {
        const { state } = test.result();
        if (state === 'passed') counts.passed++;
        else if (state === 'skipped') counts.skipped++;
        else counts.failed++;
      }
    }
    const file = process.env['BITASSAY_COUNTS'];
    if (file) writeFileSync(file, JSON.stringify(counts));
    else process.on('exit', () => console.log(`${counts.passed} passed, ${counts.failed} failed`));
  }
}
