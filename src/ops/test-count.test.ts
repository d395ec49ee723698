import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { addCounts, closingLine, countTests } from './test-count';

const folder = mkdtempSync(join(tmpdir(), 'rivenmark-count-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

interface File {
  status: 'passed' | 'failed';
  tests: string[];
}

function report(...files: File[]): string {
  const path = join(folder, 'report.json');
  const testResults = files.map(({ status, tests }, at) => ({
    name: `${at}.test.ts`,
    status,
    assertionResults: tests.map((test) => ({ status: test }))
  }));
  writeFileSync(path, JSON.stringify({ testResults }));
  return path;
}

describe('countTests', () => {
  it('adds up the tests of all files', () => {
    const path = report(
      { status: 'passed', tests: ['passed', 'skipped'] },
      { status: 'failed', tests: ['failed', 'passed'] }
    );
    expect(countTests(path, 1)).toEqual({ passed: 2, failed: 1, skipped: 1 });
  });

  it('counts a file that does not load as one failure', () => {
    expect(countTests(report({ status: 'failed', tests: [] }), 1)).toEqual({ passed: 0, failed: 1, skipped: 0 });
  });

  it('counts a failed hook after passed tests as one failure', () => {
    expect(countTests(report({ status: 'failed', tests: ['passed'] }), 1)).toEqual({
      passed: 1,
      failed: 1,
      skipped: 0
    });
  });

  it('counts an error outside all tests as one failure', () => {
    expect(countTests(report({ status: 'passed', tests: ['passed'] }), 1)).toEqual({
      passed: 1,
      failed: 1,
      skipped: 0
    });
  });

  it('counts a missing report as one failure', () => {
    expect(countTests(join(folder, 'none.json'), 0)).toEqual({ passed: 0, failed: 1, skipped: 0 });
  });
});

describe('closingLine', () => {
  it('names skipped tests only where there are some', () => {
    const one = { passed: 3, failed: 1, skipped: 0 };
    expect(closingLine(one)).toBe('3 passed, 1 failed');
    expect(closingLine(addCounts(one, { passed: 1, failed: 0, skipped: 2 }))).toBe('4 passed, 1 failed, 2 skipped');
  });
});
