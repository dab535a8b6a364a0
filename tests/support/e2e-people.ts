/**
 * People and companies for browser tests, made by the use-cases on the database of the running stack, so
 * that a test needs nothing of the demo's story and meets no other test's rows.
 */
import { randomBytes } from 'node:crypto';
import type { Actor } from '../../src/lib/domain/actor.ts';
import type { CompanyKind } from '../../src/lib/domain/roles.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { createAuth, createVerifiedPerson, loadActor, setAdmin } from '../../src/lib/server/auth/index.ts';
import { createCompany } from '../../src/lib/server/companies/index.ts';
import { loadConfig } from '../../src/lib/server/config/index.ts';
import { database } from '../../src/lib/server/db/index.ts';
import { stackInfo } from './stack-info.ts';

export interface Person {
  email: string;
  password: string;
  actor: Actor;
}

let prepared = false;

function stackDatabase() {
  if (!prepared) Object.assign(process.env, stackInfo().env);
  prepared = true;
  return database();
}

/** A word that no other test uses. */
export function aWord(): string {
  return randomBytes(4).toString('hex');
}

/** Someone who can sign in; with `admin`, an admin. */
export async function aSignUp(name: string, options: { admin?: boolean } = {}): Promise<Person> {
  const db = stackDatabase();
  const auth = createAuth({ db, config: loadConfig(process.env) });
  const email = `${name.toLowerCase().replace(/[^a-z]+/g, '.')}.${aWord()}@works.example`;
  const password = `quench ring ${aWord()} otter`;
  const userId = await createVerifiedPerson(db, auth, { name, email, password });
  if (options.admin) await setAdmin(db, email, true);
  return { email, password, actor: await loadActor(db, userId) };
}

/** An owner with a company of their own. */
export async function anOwner(
  kind: CompanyKind,
  companyName = `${kind === 'buyer' ? 'Hardening' : 'Coils'} ${aWord()}`,
): Promise<Person & { companyId: string; companyName: string }> {
  const person = await aSignUp('Owner');
  const companyId = await createCompany(stackDatabase(), person.actor, {
    commandId: newId(),
    kind,
    name: companyName,
    currency: 'EUR',
    timeZone: 'Europe/Berlin',
  });
  const actor = await loadActor(stackDatabase(), person.actor.userId);
  return { ...person, actor, companyId, companyName };
}
