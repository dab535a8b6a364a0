/** Reads the runners' JSON reports into counted results. Node built-ins only. */
import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { stripVTControlCharacters } from 'node:util';

/**
 * @typedef {{ name: string, detail: string }} Failure
 * @typedef {{ passed: number, failures: Failure[], skipped: string[], suites: Map<string, number> }} Counted
 */

/** Which tests have to be there, by folder. @type {[string, RegExp][]} */
export const suites = [
  ['unit', /^(src|fake-services|tests\/architecture)\//],
  ['published', /^tests\/published\//],
  ['integration', /^tests\/(integration|authorization)\//],
];

/** @param {string} file @returns {any} */
function parse(file) {
  if (!existsSync(file)) return undefined;
  try {
    return JSON.parse(readFileSync(file, 'utf8'));
  } catch {
    return undefined;
  }
}

/** @param {string} text @param {number} lines */
const head = (text, lines) => stripVTControlCharacters(text).split('\n').slice(0, lines).join('\n');

/**
 * Undefined when there is no readable report. A file in which nothing ran and a suite in which nothing passed
 * are failures.
 * @param {string} file @param {string} root @returns {Counted | undefined}
 */
export function countVitest(file, root) {
  const report = parse(file);
  if (!Array.isArray(report?.testResults)) return undefined;
  /** @type {Counted} */
  const counted = { passed: 0, failures: [], skipped: [], suites: new Map() };
  for (const result of report.testResults) {
    const name = path.relative(root, result.name);
    const suite = suites.find(([, pattern]) => pattern.test(name))?.[0] ?? 'other';
    if (result.assertionResults.length === 0) {
      counted.failures.push({ name: `${name}: no test ran`, detail: head(result.message ?? '', 20) });
    }
    for (const test of result.assertionResults) {
      const title = `${name} > ${[...test.ancestorTitles, test.title].join(' > ')}`;
      if (test.status === 'passed') {
        counted.passed += 1;
        counted.suites.set(suite, (counted.suites.get(suite) ?? 0) + 1);
      } else if (test.status === 'failed') {
        counted.failures.push({ name: title, detail: head((test.failureMessages ?? []).join('\n'), 12) });
      } else counted.skipped.push(title);
    }
  }
  for (const [suite] of suites) {
    if (!counted.suites.has(suite))
      counted.failures.push({ name: `suite ${suite}: no test passed`, detail: '' });
  }
  return counted;
}

/** @param {any} suite @param {string[]} above @param {(title: string, spec: any) => void} visit */
function walk(suite, above, visit) {
  const here = suite.title === '' ? above : [...above, suite.title];
  for (const spec of suite.specs ?? []) visit([...here, spec.title].join(' > '), spec);
  for (const inner of suite.suites ?? []) walk(inner, here, visit);
}

/**
 * Undefined when there is no readable report. No test at all is a failure.
 * @param {string} file @returns {Counted | undefined}
 */
export function countPlaywright(file) {
  const report = parse(file);
  if (!Array.isArray(report?.suites)) return undefined;
  /** @type {Counted} */
  const counted = { passed: 0, failures: [], skipped: [], suites: new Map() };
  let tests = 0;
  for (const suite of report.suites) {
    walk(suite, [], (title, spec) => {
      for (const test of spec.tests) {
        tests += 1;
        if (test.status === 'expected') counted.passed += 1;
        else if (test.status === 'skipped') counted.skipped.push(title);
        else {
          const errors = (test.results.at(-1)?.errors ?? []).map(
            (/** @type {any} */ error) => error.message ?? '',
          );
          counted.failures.push({ name: title, detail: head(errors.join('\n'), 25) });
        }
      }
    });
  }
  for (const error of report.errors ?? [])
    counted.failures.push({ name: 'Playwright', detail: head(error.message ?? '', 25) });
  if (tests === 0) counted.failures.push({ name: 'suite end-to-end: no test ran', detail: '' });
  counted.suites.set('end-to-end', counted.passed);
  return counted;
}
