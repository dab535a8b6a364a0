import { readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';

export interface SourceImport {
  /** File that imports, from the root. */
  from: string;
  /** As written. */
  written: string;
  /** The file it means, from the root; undefined for a package. */
  to: string | undefined;
  /** The names that are imported, where they are written out. */
  names: string[];
  /** `import type`: gone when the program runs. */
  typeOnly: boolean;
}

export function filesUnder(dir: string): string[] {
  return readdirSync(dir, { withFileTypes: true }).flatMap((entry) => {
    const full = path.posix.join(dir, entry.name);
    if (entry.isDirectory()) return entry.name === 'node_modules' ? [] : filesUnder(full);
    return /\.(ts|svelte|js|mjs)$/.test(entry.name) ? [full] : [];
  });
}

const statement =
  /(?:^|[;\n])\s*(?:import|export)\s+(type\s+)?(?:([^'";]*?)\s+from\s+)?['"]([^'"\n]+)['"]|import\(\s*['"]([^'"\n]+)['"]\s*\)/g;

function withoutComments(text: string): string {
  return text.replace(/\/\*[\s\S]*?\*\//g, '').replace(/(^|[^:'"`])\/\/[^\n]*/g, '$1');
}

/** The code of a file: a Svelte file's scripts, anything else whole. */
function codeOf(file: string): string {
  const text = readFileSync(file, 'utf8');
  const code = file.endsWith('.svelte')
    ? [...text.matchAll(/<script[^>]*>([\s\S]*?)<\/script>/g)].map((m) => m[1]).join('\n')
    : text;
  return withoutComments(code);
}

/** Every import of a file, resolved to a file of the project where it means one. */
export function importsOf(file: string): SourceImport[] {
  return [...codeOf(file).matchAll(statement)].map((match) => {
    const written = match[3] ?? match[4] ?? '';
    const names = [...(match[2] ?? '').matchAll(/[A-Za-z_$][\w$]*/g)]
      .map((m) => m[0])
      .filter((n) => n !== 'type');
    const bare = written.replace(/\?.*$/, '');
    let to: string | undefined;
    if (bare.startsWith('.')) to = path.posix.normalize(path.posix.join(path.posix.dirname(file), bare));
    else if (bare.startsWith('$lib/')) to = `src/lib/${bare.slice('$lib/'.length)}`;
    return { from: file, written, to, names, typeOnly: match[1] !== undefined };
  });
}
