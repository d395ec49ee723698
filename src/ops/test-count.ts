import { existsSync, readFileSync } from 'node:fs';
import { z } from 'zod';

export interface Count {
  passed: number;
  failed: number;
  skipped: number;
}

const reportSchema = z.object({
  testResults: z.array(
    z.object({ name: z.string(), status: z.string(), assertionResults: z.array(z.object({ status: z.string() })) })
  )
});

/**
 * Counts the tests of one Vitest run. A file that failed outside its tests (does not load, a hook failed), a run that
 * left no report, and a run that ended with an error though no test failed each count as one failure.
 * @param report path of Vitest's JSON report
 * @param status exit status of Vitest
 */
export function countTests(report: string, status: number): Count {
  const count: Count = { passed: 0, failed: 0, skipped: 0 };
  const parsed = existsSync(report) ? reportSchema.safeParse(JSON.parse(readFileSync(report, 'utf8'))) : null;
  for (const file of parsed?.success ? parsed.data.testResults : []) {
    const failed = file.assertionResults.filter((test) => test.status === 'failed').length;
    const passed = file.assertionResults.filter((test) => test.status === 'passed').length;
    count.passed += passed;
    count.failed += failed;
    count.skipped += file.assertionResults.length - passed - failed;
    if (file.status === 'failed' && failed === 0) count.failed++;
  }
  const lost = !parsed?.success || (status !== 0 && count.failed === 0);
  return lost ? { ...count, failed: count.failed + 1 } : count;
}

export const addCounts = (a: Count, b: Count): Count => ({
  passed: a.passed + b.passed,
  failed: a.failed + b.failed,
  skipped: a.skipped + b.skipped
});

/** The closing line of the test command. */
export const closingLine = ({ passed, failed, skipped }: Count) =>
  `${passed} passed, ${failed} failed${skipped > 0 ? `, ${skipped} skipped` : ''}`;
