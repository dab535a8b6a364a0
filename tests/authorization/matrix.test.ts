import { copyFileSync, rmSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { Call } from './call.ts';
import { rules, type Rule } from './rules.ts';
import type { RouteHandler } from './routes.ts';
import { testDatabase } from '../support/db.ts';
import type { Visitor, World } from './world.ts';

/*
 * Every way into the application × every kind of visitor. The handlers are the real ones, called with
 * the actor that the hook would have found, on a real database file:
 *   who may not come in is refused and nothing changes, in any table;
 *   who may is not refused (what the use-case then makes of it is tested with the use-case);
 *   an object that does not exist looks to everybody like one that is somebody else's.
 * A handler without a line in rules.ts fails, and so does a line without a handler.
 */
const t = await testDatabase();
process.env['DATABASE_URL'] = `file:${t.file}`;
// Nothing listens here: the matrix has no outside services.
for (const name of ['STRIPE_API_BASE', 'S3_ENDPOINT', 'S3_PUBLIC_ENDPOINT'])
  process.env[name] = 'http://127.0.0.1:9';

const { allHandlers } = await import('./routes.ts');
const { buildWorld, fingerprint, visitors } = await import('./world.ts');
const { call } = await import('./call.ts');
const { createAuth, provideAuth } = await import('../../src/lib/server/auth/index.ts');
const { config } = await import('../../src/lib/server/config/index.ts');
const { closeDatabase, database } = await import('../../src/lib/server/db/index.ts');

const handlers = await allHandlers();
let world: World;

let copies = 0;

/** The world as it was built, in a fresh copy of its file: one that is open is never written over. */
async function restore(): Promise<void> {
  closeDatabase();
  copies += 1;
  const copy = `${t.file}.${copies}`;
  copyFileSync(`${t.file}.built`, copy);
  config().database.url = `file:${copy}`;
  provideAuth(createAuth({ db: database(), config: config() }));
  await database().$client.execute('select 1');
  for (const side of ['', '-wal', '-shm']) rmSync(`${t.file}.${copies - 1}${side}`, { force: true });
}

beforeAll(async () => {
  world = await buildWorld(t.db);
  await t.db.$client.execute('PRAGMA wal_checkpoint(TRUNCATE)');
  copyFileSync(t.file, `${t.file}.built`);
  await restore();
});
afterAll(() => {
  closeDatabase();
  t.close();
});

function ruleFor(target: RouteHandler): Rule | undefined {
  const route = rules[target.route];
  const found = route?.handlers[target.handler] ?? route?.handlers['*'];
  return found && 'may' in found ? found : found ? { may: found } : undefined;
}

function callFor(target: RouteHandler, rule: Rule, visitor: Visitor, params?: Record<string, string>): Call {
  return {
    actor: visitor === 'visitor' ? null : world.actors[visitor],
    params: params ?? rules[target.route]?.params?.(world.ids) ?? {},
    ...(rule.body ? { body: rule.body(world.ids) } : {}),
  };
}

test('every way in has a rule, and every rule is about a way in', () => {
  const without = handlers.filter((h) => !ruleFor(h)).map((h) => `${h.route} ${h.handler}`);
  expect(without, 'add who may come in to tests/authorization/rules.ts').toEqual([]);
  const routes = new Set(handlers.map((h) => h.route));
  const planned = [
    '/accuracy',
    '/bench',
    '/(app)/account/notifications',
    '/api/v1/impedance',
    '/api/v1/heatings',
  ];
  expect(Object.keys(rules).filter((route) => !routes.has(route) && !planned.includes(route))).toEqual([]);
  const gone = Object.entries(rules).flatMap(([route, { handlers: named }]) =>
    Object.keys(named)
      .filter((name) => name !== '*' && routes.has(route) && !['load', 'page', 'layout'].includes(name))
      .filter((name) => !handlers.some((h) => h.route === route && h.handler === name))
      .map((name) => `${route} ${name}`),
  );
  expect(gone).toEqual([]);
});

test('params of every route are given', () => {
  for (const { route, params } of handlers) {
    expect(Object.keys(rules[route]?.params?.(world.ids) ?? {}).sort(), route).toEqual([...params].sort());
  }
});

const callable = handlers.filter((h) => !['page', 'universal'].includes(h.handler) && ruleFor(h));

describe('who may not come in is refused and changes nothing', () => {
  test.each(callable.map((h) => [`${h.route} ${h.handler}`, h] as const))('%s', async (_name, target) => {
    const rule = ruleFor(target);
    if (!rule) throw new Error('no rule');
    const before = await fingerprint(database());
    const letIn: string[] = [];
    for (const visitor of visitors.filter((v) => !rule.may.includes(v))) {
      const outcome = await call(target, callFor(target, rule, visitor));
      // With a valid body it must be the guard that refuses; without one the form may be the first to say no.
      const kept = outcome.kind === 'refused' || (outcome.kind === 'stopped' && !rule.body);
      if (!kept) letIn.push(`${visitor}: ${outcome.status} ${outcome.note}`);
    }
    expect(letIn).toEqual([]);
    expect(await fingerprint(database())).toEqual(before);
  });
});

describe('who may come in is not refused', () => {
  test.each(callable.map((h) => [`${h.route} ${h.handler}`, h] as const))('%s', async (_name, target) => {
    const rule = ruleFor(target);
    if (!rule) throw new Error('no rule');
    const reads = ['load', 'layout', 'GET'].includes(target.handler);
    if (rule.refusalOnly) return expect(rule.refusalOnly).toMatch(/^needs /);
    const turnedAway: string[] = [];
    for (const visitor of rule.may) {
      if (!reads) await restore();
      const outcome = await call(target, callFor(target, rule, visitor));
      if (outcome.kind === 'refused') turnedAway.push(`${visitor}: ${outcome.status} ${outcome.note}`);
    }
    if (!reads) await restore();
    expect(turnedAway).toEqual([]);
  });
});

describe('what does not exist looks like what is somebody else’s', () => {
  const withObject = callable.filter((h) => h.params.includes('id') && ['load', 'GET'].includes(h.handler));
  test.each(withObject.map((h) => [`${h.route} ${h.handler}`, h] as const))('%s', async (_name, target) => {
    const rule = ruleFor(target);
    if (!rule) throw new Error('no rule');
    const params = {
      ...rules[target.route]?.params?.(world.ids),
      id: '01940000-0000-7000-8000-000000000000',
    };
    for (const visitor of ['buyer-owner', 'maker-owner', 'admin', 'stranger'] as const) {
      const missing = await call(target, callFor(target, rule, visitor, params));
      expect(missing, visitor).toMatchObject({ kind: 'refused' });
      expect([403, 404], visitor).toContain(missing.status);
    }
  });
});
