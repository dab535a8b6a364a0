import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { filesUnder, importsOf, type SourceImport } from './imports.ts';

/**
 * What may import what. A failure says which file breaks which rule and where the code belongs instead.
 * Tests may reach further than the code they test.
 */
const isTest = (file: string) => /\.test\.ts$/.test(file) || file.startsWith('tests/');
const sources = [...filesUnder('src'), ...filesUnder('fake-services')].filter((file) => !isTest(file));
const imports = sources.flatMap(importsOf);

const lib = (folder: string) => `src/lib/${folder}/`;
const inFolder = (file: string | undefined, ...folders: string[]) =>
  file !== undefined && folders.some((folder) => file.startsWith(folder));

function breaches(select: (i: SourceImport) => boolean, remedy: string): string[] {
  return imports.filter(select).map((i) => `${i.from} imports ${i.written}: ${remedy}`);
}

/** Packages a folder may use; everything else must be its own. */
function onlyImports(folder: string, own: string[], packages: RegExp, remedy: string): string[] {
  return breaches(
    (i) => i.from.startsWith(folder) && (i.to ? !inFolder(i.to, ...own) : !packages.test(i.written)),
    remedy,
  );
}

const nothing = /^$/;
const svelte = /^(svelte(\/|$)|\$app\/|bits-ui|@lucide\/svelte|mode-watcher|svelte-sonner|d3-|\.\/\$types)/;

test('there is something to look at', () => {
  expect(sources.length).toBeGreaterThan(100);
  expect(imports.length).toBeGreaterThan(300);
});

test('the physics imports nothing but itself', () => {
  expect(
    onlyImports(
      lib('induction'),
      [lib('induction')],
      nothing,
      'the physics is pure; pass the value in, or move this code to src/lib/server/checks or src/lib/features',
    ),
  ).toEqual([]);
});

test('the vocabulary imports itself and types of the physics', () => {
  expect(
    onlyImports(
      lib('domain'),
      [lib('domain'), lib('induction')],
      nothing,
      'domain is pure; rules that need a database belong to src/lib/server/<domain>/rules.ts',
    ),
  ).toEqual([]);
});

test('schemas import domain, physics and zod', () => {
  expect(
    onlyImports(
      lib('schemas'),
      [lib('schemas'), lib('domain'), lib('induction')],
      /^zod$/,
      'schemas run in browser and server; move what needs more to the feature or the server domain',
    ),
  ).toEqual([]);
});

test('generic components know nothing of coils, companies or the server', () => {
  expect(
    onlyImports(
      lib('ui'),
      [lib('ui')],
      svelte,
      'a component that knows of the application belongs to src/lib/features/<capability>',
    ),
  ).toEqual([]);
});

test('drawing imports physics, vocabulary and its own libraries', () => {
  expect(
    onlyImports(
      lib('drawing'),
      [lib('drawing'), lib('induction'), lib('domain'), lib('schemas')],
      /^(makerjs|d3-)/,
      'drawing turns geometry into models; move what else it needs to the caller',
    ),
  ).toEqual([]);
});

// Types of what a page hands over are gone in the browser; code of the server never gets there.
test('features never import code of the server', () => {
  expect(
    breaches(
      (i) =>
        i.from.startsWith(lib('features')) && !i.typeOnly && inFolder(i.to, lib('server'), 'src/routes/'),
      'pass it as a property from the page; a constant that both need belongs to src/lib/domain',
    ),
  ).toEqual([]);
});

test('browser code imports no package that is the server’s', () => {
  const serverPackages =
    /^(drizzle-orm|@libsql|stripe|nodemailer|@aws-sdk|better-auth|pino|piscina|pdfkit|node:)/;
  expect(
    breaches(
      (i) =>
        inFolder(i.from, lib('features'), lib('ui'), lib('drawing')) &&
        i.to === undefined &&
        serverPackages.test(i.written),
      'call it in src/lib/server and hand the result over',
    ),
  ).toEqual([]);
});

test('server code loads in plain Node: relative paths with their endings, nothing of Kit outside http', () => {
  expect(
    breaches(
      (i) =>
        i.from.startsWith(lib('server')) &&
        (/^\$(lib|env|app)/.test(i.written) ||
          (i.written.startsWith('@sveltejs/') && !i.from.startsWith(lib('server/http'))) ||
          (i.written.startsWith('.') && !/\.(ts|json)$/.test(i.written))),
      'write the relative path with its .ts ending; what needs Kit belongs to src/lib/server/http or the route',
    ),
  ).toEqual([]);
});

test('the server imports no component', () => {
  expect(
    breaches(
      (i) => i.from.startsWith(lib('server')) && inFolder(i.to, lib('features'), lib('ui'), 'src/routes/'),
      'a constant that both need belongs to src/lib/domain',
    ),
  ).toEqual([]);
});

/** From the ground up; a domain imports those before it, never those after. */
const order = [
  ['config', 'log', 'adapters', 'db', 'access', 'audit', 'outbox', 'jobs', 'http'],
  ['auth'],
  ['files'],
  ['companies'],
  ['verification', 'notifications', 'machines'],
  ['checks'],
  ['requests'],
  ['bids'],
  ['orders'],
  ['money'],
  ['disputes'],
  ['coils', 'messages', 'search', 'papers', 'admin'],
  ['workflows'],
];
const rank = new Map(order.flatMap((names, level) => names.map((name) => [name, level] as const)));
const serverModule = (file: string | undefined) => /^src\/lib\/server\/([^/]+)\//.exec(file ?? '')?.[1];

test('every folder of the server has its place in the order', () => {
  const folders = new Set(sources.map(serverModule).filter((name) => name !== undefined));
  expect([...folders].filter((name) => !rank.has(name))).toEqual([]);
});

test('domains import downwards only', () => {
  expect(
    breaches((i) => {
      const from = rank.get(serverModule(i.from) ?? '');
      const to = rank.get(serverModule(i.to) ?? '');
      return from !== undefined && to !== undefined && to > from;
    }, 'what a lower domain must set off in a higher one belongs to src/lib/server/workflows'),
  ).toEqual([]);
});

/** Doors besides index.ts, each with its reason. */
const sideDoors = [
  'src/lib/server/companies/recipients.ts', // used by every domain for its mails; index.ts would draw in all of companies
  'src/lib/server/auth/instance.ts',
];
const ground = new Set(order[0]);

test('another domain is entered by its index.ts', () => {
  expect(
    breaches((i) => {
      const from = serverModule(i.from);
      const to = serverModule(i.to);
      if (!from || !to || from === to || ground.has(to) || to === 'workflows') return false;
      return !i.to?.endsWith('/index.ts') && !sideDoors.includes(i.to ?? '');
    }, 'export what is needed from the index.ts of that domain'),
  ).toEqual([]);
});

test('routes are thin: domains by their index.ts, no database but its handle, no SDK', () => {
  const doors =
    /^src\/lib\/server\/([^/]+\/index\.ts|http\/[^/]+\.ts|workflows\/[^/]+\.ts|adapters\/ids\.ts)$/;
  const packages = /^(drizzle-orm|@libsql|stripe|nodemailer|@aws-sdk|better-auth)/;
  expect(
    breaches((i) => {
      if (!i.from.startsWith('src/routes/')) return false;
      if (i.to === undefined) return packages.test(i.written);
      if (!i.to.startsWith(lib('server'))) return false;
      if (i.to === 'src/lib/server/db/index.ts')
        return i.names.some((n) => !['database', 'Database'].includes(n));
      return !doors.test(i.to);
    }, 'move the work into a use-case of src/lib/server/<domain> and export it from its index.ts'),
  ).toEqual([]);
});

test('stand-ins of outside services know nothing of the product', () => {
  expect(
    breaches(
      (i) => i.from.startsWith('fake-services/') && inFolder(i.to, 'src/'),
      'a stand-in speaks the protocol of the service; copy the constant or read it from the environment',
    ),
  ).toEqual([]);
});

test('there is no folder of odds and ends, and no barrel above one module', () => {
  expect(sources.filter((file) => /\/(utils?|helpers?|common|misc)\//.test(file))).toEqual([]);
  expect(
    [
      'src/lib/index.ts',
      'src/lib/server/index.ts',
      'src/lib/features/index.ts',
      'src/lib/ui/index.ts',
    ].filter((file) => sources.includes(file)),
  ).toEqual([]);
});

test('only the configuration reads the environment', () => {
  const readers = sources.filter(
    (file) =>
      inFolder(file, 'src/lib/', 'src/routes/') &&
      file !== 'src/lib/server/config/index.ts' &&
      /process\.env|\$env\//.test(readFileSync(file, 'utf8')),
  );
  expect(readers, 'read it in src/lib/server/config/index.ts and pass it on').toEqual([]);
});

/** Versions below these have known holes or faults (assurance, section 5). */
const minimum: Record<string, string> = {
  '@sveltejs/kit': '2.70.4',
  'better-auth': '1.7.16',
  nodemailer: '10.4.1',
  'drizzle-orm': '0.45.2',
  devalue: '5.6.3',
  'sveltekit-superforms': '2.27.4',
};

function atLeast(version: string, least: string): boolean {
  const [a, b] = [version, least].map((v) => v.split('-')[0]?.split('.').map(Number) ?? []);
  for (let i = 0; i < 3; i += 1) {
    const difference = (a?.[i] ?? 0) - (b?.[i] ?? 0);
    if (difference !== 0) return difference > 0;
  }
  return true;
}

test('installed versions are not below those with known holes', () => {
  for (const [name, least] of Object.entries(minimum)) {
    const installed = JSON.parse(readFileSync(`node_modules/${name}/package.json`, 'utf8')) as {
      version: string;
    };
    expect(atLeast(installed.version, least), `${name} ${installed.version} is below ${least}`).toBe(true);
  }
  expect(atLeast('2.9.0', '2.10.0')).toBe(false);
});

test('every dependency is pinned to one exact version, and the lock names no host', () => {
  const manifest = JSON.parse(readFileSync('package.json', 'utf8')) as Record<string, Record<string, string>>;
  const loose = ['dependencies', 'devDependencies']
    .flatMap((kind) => Object.entries(manifest[kind] ?? {}))
    .filter(([, version]) => !/^\d+\.\d+\.\d+(-[\w.]+)?$/.test(version));
  expect(loose).toEqual([]);
  expect(readFileSync('package-lock.json', 'utf8')).not.toMatch(/"resolved": "https?:/);
});
