import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { countPlaywright, countVitest } from '../support/reports.mjs';

const folder = mkdtempSync(path.join(tmpdir(), 'coilyard-reports-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function report(content: unknown): string {
  const file = path.join(folder, `${String(Math.random()).slice(2)}.json`);
  writeFileSync(file, typeof content === 'string' ? content : JSON.stringify(content));
  return file;
}

const test = (status: string, title = 'holds') => ({
  status,
  title,
  ancestorTitles: ['a thing'],
  failureMessages: ['because'],
});
const file = (name: string, ...tests: object[]) => ({
  name: `/root/${name}`,
  assertionResults: tests,
  message: '',
});
const enough = [
  file('src/a.test.ts', test('passed')),
  file('tests/published/b.test.ts', test('passed')),
  file('tests/integration/c.test.ts', test('passed')),
];
const vitest = (...files: object[]) => countVitest(report({ testResults: files }), '/root');

describe('counting the unit runner’s report', () => {
  it('counts what passed, by suite', () => {
    const counted = vitest(...enough);
    expect(counted).toMatchObject({ passed: 3, failures: [], skipped: [] });
    expect([...(counted?.suites ?? [])]).toEqual([
      ['unit', 1],
      ['published', 1],
      ['integration', 1],
    ]);
  });

  it('names what failed and what was skipped', () => {
    const counted = vitest(
      ...enough,
      file('src/d.test.ts', test('failed', 'breaks'), test('skipped', 'rests')),
    );
    expect(counted?.failures).toEqual([{ name: 'src/d.test.ts > a thing > breaks', detail: 'because' }]);
    expect(counted?.skipped).toEqual(['src/d.test.ts > a thing > rests']);
  });

  it('counts a file in which nothing ran as a failure', () => {
    expect(vitest(...enough, file('src/e.test.ts'))?.failures).toMatchObject([
      { name: 'src/e.test.ts: no test ran' },
    ]);
  });

  it('counts a suite in which nothing passed as a failure', () => {
    const counted = vitest(
      enough[0] ?? {},
      enough[1] ?? {},
      file('tests/integration/c.test.ts', test('skipped')),
    );
    expect(counted?.failures).toMatchObject([{ name: 'suite integration: no test passed' }]);
  });

  it('has no result for a missing or broken report', () => {
    expect(countVitest(path.join(folder, 'none.json'), '/root')).toBeUndefined();
    expect(countVitest(report('{"testResults": ['), '/root')).toBeUndefined();
    expect(countVitest(report({}), '/root')).toBeUndefined();
  });
});

const spec = (title: string, status: string, message = '') => ({
  title,
  tests: [{ status, results: [{ errors: message === '' ? [] : [{ message }] }] }],
});

describe('counting the browser runner’s report', () => {
  it('counts nested suites, failures with their first lines and skips', () => {
    const counted = countPlaywright(
      report({
        suites: [
          {
            title: 'a.spec.ts',
            specs: [spec('signs in', 'expected')],
            suites: [
              {
                title: 'orders',
                specs: [
                  spec('awards', 'unexpected', '\u001b[31mno button\u001b[39m'),
                  spec('later', 'skipped'),
                ],
              },
            ],
          },
        ],
        errors: [],
      }),
    );
    expect(counted).toMatchObject({
      passed: 1,
      failures: [{ name: 'a.spec.ts > orders > awards', detail: 'no button' }],
      skipped: ['a.spec.ts > orders > later'],
    });
  });

  it('counts a flaky test as failed', () => {
    const counted = countPlaywright(
      report({ suites: [{ title: 'a.spec.ts', specs: [spec('sometimes', 'flaky')] }] }),
    );
    expect(counted).toMatchObject({ passed: 0, failures: [{ name: 'a.spec.ts > sometimes' }] });
  });

  it('counts errors outside of tests, and no test at all, as failures', () => {
    const counted = countPlaywright(report({ suites: [], errors: [{ message: 'no such file' }] }));
    expect(counted?.failures.map((failure) => failure.name)).toEqual([
      'Playwright',
      'suite end-to-end: no test ran',
    ]);
    expect(countPlaywright(path.join(folder, 'none.json'))).toBeUndefined();
  });
});
