/**
 * `npm run report:physics`: runs every comparison with the outside and writes what it gave to
 * src/lib/features/accuracy/accuracy.json (shown at /accuracy, committed) and to reports/physics.md.
 * When a comparison fails, the record stays as it was and the text says which.
 */
import { spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { methodVersion } from '../../../src/lib/induction/version.ts';
import { recordOf, recordText, reportText, type ReportLine } from './report-lines.ts';

const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '../../..');

function runTests(folder: string): boolean {
  const run = spawnSync(
    process.execPath,
    [path.join(root, 'node_modules/vitest/vitest.mjs'), 'run', '--project', 'published', '--reporter=dot'],
    { cwd: root, env: { ...process.env, PHYSICS_REPORT: folder }, stdio: 'inherit' },
  );
  return run.status === 0;
}

function readLines(folder: string): ReportLine[] {
  return readdirSync(folder).flatMap((file) =>
    readFileSync(path.join(folder, file), 'utf8')
      .split('\n')
      .filter((text) => text !== '')
      .map((text) => ({ ...(JSON.parse(text) as ReportLine), subject: path.basename(file, '.jsonl') })),
  );
}

function main(): number {
  const folder = mkdtempSync(path.join(tmpdir(), 'coilyard-physics-'));
  try {
    const passed = runTests(folder);
    const lines = readLines(folder);
    const failed = lines.filter((line) => !line.met);
    const record = recordOf(methodVersion, lines);
    const text = path.join(root, 'reports/physics.md');
    mkdirSync(path.dirname(text), { recursive: true });
    writeFileSync(text, reportText(record, failed));
    if (!passed || failed.length > 0 || lines.length === 0) {
      process.stderr.write(`A comparison failed; ${text} says which. The record was not changed.\n`);
      return 1;
    }
    const file = path.join(root, 'src/lib/features/accuracy/accuracy.json');
    writeFileSync(file, recordText(record));
    process.stdout.write(`${lines.length} comparisons written to ${path.relative(root, file)}\n`);
    return 0;
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

process.exitCode = main();
