import { accessSync, constants } from 'node:fs';
import path from 'node:path';
import process from 'node:process';

const minute = 60_000;

/** @param {string} file */
function executable(file) {
  try {
    accessSync(file, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

/** The browser that is there: the one asked for, or the first on the path. */
export function findChromium() {
  const asked = process.env['CHROMIUM_PATH'];
  if (asked) return executable(asked) ? asked : undefined;
  const folders = [...(process.env['PATH'] ?? '').split(path.delimiter), '/usr/bin'];
  for (const name of ['chromium', 'chromium-browser', 'google-chrome-stable', 'google-chrome']) {
    for (const folder of folders) {
      const file = path.join(folder, name);
      if (folder !== '' && executable(file)) return file;
    }
  }
  return undefined;
}

/**
 * Installs Chromium from Debian's packages where that is possible: as root with apt-get.
 * @param {(command: string[], options: { env: Record<string, string>, timeoutMs: number }) => { done: Promise<{ code: number | null, output: string }> }} start
 * @param {(line: string) => void} say
 */
export async function installChromium(start, say) {
  const isRoot = process.getuid?.() === 0;
  if (process.env['CHROMIUM_PATH'] || !isRoot || !executable('/usr/bin/apt-get')) return undefined;
  say('Installing Chromium …');
  const env = { DEBIAN_FRONTEND: 'noninteractive' };
  const update = await start(['/usr/bin/apt-get', 'update'], { env, timeoutMs: 5 * minute }).done;
  if (update.code !== 0) say(update.output.trimEnd().split('\n').slice(-8).join('\n'));
  const install = await start(['/usr/bin/apt-get', 'install', '-y', '--no-install-recommends', 'chromium'], {
    env,
    timeoutMs: 10 * minute,
  }).done;
  if (install.code !== 0) say(install.output.trimEnd().split('\n').slice(-8).join('\n'));
  return findChromium();
}
