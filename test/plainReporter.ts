import type { Reporter, TestModule } from 'vitest/node';

/**
 * Ends a test run in plain words: what was left out and why, then the counts alone on the last line. With
 * FORESHIFT_ALL_TESTS set (as on the build machine) a test left out is a failure.
 */
export default class PlainReporter implements Reporter {
  onTestRunEnd(modules: readonly TestModule[]): void {
    const counts = { passed: 0, failed: 0, skipped: 0 };
    const leftOut = new Map<string, number>();
    for (const module of modules) {
      if (module.state() === 'failed' && [...module.children.allTests()].length === 0) counts.failed++;
      for (const test of module.children.allTests()) {
        const { state } = test.result();
        if (state === 'passed' || state === 'failed') counts[state]++;
        else {
          counts.skipped++;
          const file = module.relativeModuleId;
          leftOut.set(file, (leftOut.get(file) ?? 0) + 1);
        }
      }
    }
    const lines = [...leftOut].map(
      ([file, count]) => `  ${file}: ${count} ${count === 1 ? 'test' : 'tests'}, ${reason(file)}`,
    );
    if (lines.length > 0) process.stdout.write(`\nLeft out:\n${lines.join('\n')}\n`);
    const strict = process.env.FORESHIFT_ALL_TESTS !== undefined;
    const failed = counts.failed + (strict ? counts.skipped : 0);
    if (strict && counts.skipped > 0) {
      process.stdout.write('FORESHIFT_ALL_TESTS is set: what was left out counts as failed.\n');
      process.exitCode = 1;
    }
    process.stdout.write(
      `\n${counts.passed} passed, ${failed} failed${strict || counts.skipped === 0 ? '' : `, ${counts.skipped} skipped`}\n`,
    );
  }
}

function reason(file: string): string {
  if (file.startsWith('test/e2e/')) {
    return 'because no Chromium was found; install it (Debian: apt-get install chromium) or set FORESHIFT_CHROMIUM to its path';
  }
  return 'see the condition in the file';
}
