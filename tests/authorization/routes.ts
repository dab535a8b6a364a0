import { pathToFileURL } from 'node:url';
import path from 'node:path';
import { readdirSync } from 'node:fs';

export interface RouteHandler {
  /** Route id as Kit gives it, groups included, e.g. `/(app)/orders/[id]`. */
  route: string;
  /** `load`, `layout`, `page` (no server code), `GET` …, or `action:name`. */
  handler: string;
  file: string;
  /** Params of the route in order. */
  params: string[];
}

interface ServerModule {
  load?: unknown;
  actions?: Record<string, unknown>;
  [method: string]: unknown;
}

const methods = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE', 'OPTIONS', 'HEAD', 'fallback'];

function routeFiles(dir: string): string[] {
  return readdirSync(dir, { withFileTypes: true }).flatMap((entry) => {
    const full = path.posix.join(dir, entry.name);
    if (entry.isDirectory()) return routeFiles(full);
    return /^\+(page|layout|server)/.test(entry.name) ? [full] : [];
  });
}

export async function loadModule(file: string): Promise<ServerModule> {
  return (await import(/* @vite-ignore */ pathToFileURL(path.resolve(file)).href)) as ServerModule;
}

/** Every way into the application, read from the source tree: what is not listed here cannot be called. */
export async function allHandlers(): Promise<RouteHandler[]> {
  const files = routeFiles('src/routes').sort();
  const found: RouteHandler[] = [];
  for (const file of files) {
    const route = path.posix.dirname(file).slice('src/routes'.length) || '/';
    const params = [...route.matchAll(/\[+(?:\.\.\.)?([^\]=]+)(?:=[^\]]+)?\]+/g)].map((m) => m[1] ?? '');
    const add = (handler: string) => found.push({ route, handler, file, params });
    const name = path.posix.basename(file);
    if (name === '+page.svelte') {
      if (!files.includes(file.replace('+page.svelte', '+page.server.ts'))) add('page');
    } else if (/^\+(page|layout)\.server\.ts$/.test(name)) {
      const module = await loadModule(file);
      if (module.load) add(name.startsWith('+layout') ? 'layout' : 'load');
      for (const action of Object.keys(module.actions ?? {})) add(`action:${action}`);
    } else if (name === '+server.ts') {
      const module = await loadModule(file);
      for (const method of methods) if (module[method]) add(method);
    } else if (/^\+(page|layout)\.ts$/.test(name)) {
      // Universal loads run in the browser too and hold no secret; they reach data through the handlers above.
      add('universal');
    }
  }
  return found;
}
