import type { Actor } from '../../src/lib/domain/actor.ts';
import { dayMs } from '../../src/lib/domain/dates.ts';
import type { Currency } from '../../src/lib/domain/money.ts';
import type { CompanyKind, Role } from '../../src/lib/domain/roles.ts';
import { businessNow } from '../../src/lib/server/adapters/clock.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { loadActor } from '../../src/lib/server/auth/actor.ts';
import type { Database } from '../../src/lib/server/db/index.ts';
import { user } from '../../src/lib/server/db/schema/auth.ts';
import { company, membership } from '../../src/lib/server/db/schema/companies.ts';

export interface CompanyOptions {
  name?: string;
  currency?: Currency;
  timeZone?: string;
  /** Fabricators only: verified for a year. */
  verified?: boolean;
  approvalLimit?: number | null;
}

export interface PersonOptions {
  name?: string;
  email?: string;
  emailVerified?: boolean;
  timeZone?: string;
  unitSet?: 'metric' | 'inch';
}

let serial = 0;

async function insertUser(db: Database, options: PersonOptions & { isAdmin?: boolean }) {
  serial += 1;
  const id = newId();
  const now = new Date();
  const row = {
    id,
    name: options.name ?? `Person ${serial}`,
    email: options.email ?? `person-${serial}-${id.slice(-6)}@works.example`,
    emailVerified: options.emailVerified ?? true,
    createdAt: now,
    updatedAt: now,
    isAdmin: options.isAdmin ?? false,
    timeZone: options.timeZone ?? 'Europe/Berlin',
    unitSet: options.unitSet ?? ('metric' as const),
  };
  await db.insert(user).values(row);
  return row;
}

/** The actor as the hook builds it, read afresh from the tables. */
export const actorFor = (db: Database, userId: string): Promise<Actor> => loadActor(db, userId);

/** A company without members; returns its id. Fabricators are unverified unless told. */
export async function aCompany(
  db: Database,
  kind: CompanyKind,
  options: CompanyOptions = {},
): Promise<string> {
  serial += 1;
  const founder = await insertUser(db, { name: `Founder ${serial}` });
  const id = newId();
  const now = await businessNow(db);
  await db.insert(company).values({
    id,
    kind,
    name: options.name ?? `${kind === 'buyer' ? 'Hardening' : 'Coil'} Works ${serial} ${id.slice(-6)}`,
    currency: options.currency ?? 'EUR',
    timeZone: options.timeZone ?? 'Europe/Berlin',
    approvalLimit: options.approvalLimit ?? null,
    verifiedUntil: kind === 'fabricator' && options.verified ? now + 365 * dayMs : null,
    createdAt: now,
    createdBy: founder.id,
    commandId: newId(),
  });
  return id;
}

/** A new person with these roles in the company, as an actor. */
export async function aMember(
  db: Database,
  companyId: string,
  roles: readonly Role[],
  options: PersonOptions = {},
): Promise<Actor> {
  const person = await insertUser(db, options);
  await db.insert(membership).values({
    id: newId(),
    companyId,
    userId: person.id,
    roles: [...roles],
    createdAt: await businessNow(db),
  });
  return actorFor(db, person.id);
}

/** A person without any company. */
export async function aPerson(db: Database, options: PersonOptions = {}): Promise<Actor> {
  return actorFor(db, (await insertUser(db, options)).id);
}

/** An admin; admins hold no membership. */
export async function anAdmin(db: Database, options: PersonOptions = {}): Promise<Actor> {
  return actorFor(db, (await insertUser(db, { ...options, isAdmin: true })).id);
}
