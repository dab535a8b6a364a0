import { eq } from 'drizzle-orm';
import type { Actor } from '../../lib/domain/actor.ts';
import { addDays, dateIn } from '../../lib/domain/dates.ts';
import type { Currency } from '../../lib/domain/money.ts';
import type { CompanyKind, Role } from '../../lib/domain/roles.ts';
import { fabricatorProfileInput } from '../../lib/schemas/forms/verification.ts';
import { businessNow } from '../../lib/server/adapters/clock.ts';
import { enrolSecondFactor, setAdmin } from '../../lib/server/auth/index.ts';
import {
  addAddress,
  createCompany,
  setApprovalLimit,
  updateCompany,
} from '../../lib/server/companies/index.ts';
import { company } from '../../lib/server/db/schema/companies.ts';
import { addCompanyDocument } from '../../lib/server/files/index.ts';
import { openOnboarding, payoutAccountOf, refreshPayoutAccount } from '../../lib/server/money/index.ts';
import {
  askForVerification,
  verificationCaseFor,
  verifyFabricator,
} from '../../lib/server/verification/index.ts';
import { plainPdf } from './papers.ts';
import type { SeedWorld } from './world.ts';

export interface Buyer {
  id: string;
  owner: Actor;
  engineer: Actor;
  purchaser: Actor;
  technician: Actor;
}
export interface Shop {
  id: string;
  owner: Actor;
  estimator: Actor;
  builder: Actor;
}

interface CompanyFacts {
  name: string;
  short: string;
  kind: CompanyKind;
  currency: Currency;
  timeZone: string;
  about: string;
  taxNumber: string;
  address: { line1: string; postalCode: string; city: string; country: string };
  unitSet?: 'metric' | 'inch';
}

async function found(world: SeedWorld, facts: CompanyFacts) {
  const domain = `${facts.short.toLowerCase()}.example`;
  const set = { timeZone: facts.timeZone, unitSet: facts.unitSet ?? ('metric' as const) };
  const founder = await world.person(`${facts.short} owner`, `owner@${domain}`, facts.name, set);
  const id = await createCompany(world.db, founder, {
    commandId: world.command(),
    kind: facts.kind,
    name: facts.name,
    currency: facts.currency,
    timeZone: facts.timeZone,
  });
  const owner = await world.actor(founder.userId);
  await updateCompany(world.db, owner, {
    companyId: id,
    version: 1,
    name: facts.name,
    timeZone: facts.timeZone,
    taxNumber: facts.taxNumber,
    website: '',
    about: facts.about,
  });
  await addAddress(world.db, owner, {
    companyId: id,
    purpose: facts.kind === 'buyer' ? 'delivery' : 'works',
    address: { name: facts.name, line2: '', region: '', ...facts.address },
  });
  const member = async (role: Role) =>
    world.join(
      owner,
      id,
      await world.person(`${facts.short} ${role}`, `${role}@${domain}`, facts.name, set),
      [role],
    );
  return { id, owner, member };
}

export async function foundBuyer(world: SeedWorld, facts: Omit<CompanyFacts, 'kind'>): Promise<Buyer> {
  const { id, owner, member } = await found(world, { ...facts, kind: 'buyer' });
  return {
    id,
    owner,
    engineer: await member('engineer'),
    purchaser: await member('purchaser'),
    technician: await member('technician'),
  };
}

export async function limitAwards(world: SeedWorld, buyer: Buyer, approvalLimit: number): Promise<void> {
  const [row] = await world.db
    .select({ version: company.version })
    .from(company)
    .where(eq(company.id, buyer.id));
  await setApprovalLimit(world.db, buyer.owner, {
    companyId: buyer.id,
    approvalLimit,
    version: row?.version ?? 0,
  });
}

export interface ShopFacts extends Omit<CompanyFacts, 'kind'> {
  statement: string;
  shapes: string[];
  work: string[];
  tests: string[];
  tubeMin: string;
  tubeMax: string;
}

/** A fabricator that has named its papers and asked to be verified. */
export async function foundShop(world: SeedWorld, facts: ShopFacts): Promise<Shop & { caseId: string }> {
  const { id, owner, member } = await found(world, { ...facts, kind: 'fabricator' });
  const paper = await plainPdf('Extract from the register of companies', [
    facts.name,
    `${facts.address.line1}, ${facts.address.postalCode} ${facts.address.city}`,
    'Invented for the demo.',
  ]);
  const fileId = await world.upload(
    owner,
    id,
    'company-document',
    'register-extract.pdf',
    'application/pdf',
    paper,
  );
  const { id: documentId } = await addCompanyDocument(world.db, owner, id, {
    file: fileId,
    kind: 'registration',
    title: 'Register extract',
  });
  const profile = fabricatorProfileInput('metric').parse({
    statement: facts.statement,
    worksName: facts.name,
    worksLine1: facts.address.line1,
    worksPostalCode: facts.address.postalCode,
    worksCity: facts.address.city,
    worksCountry: facts.address.country,
    shapes: facts.shapes,
    work: facts.work,
    tests: facts.tests,
    tubeMin: facts.tubeMin,
    tubeMax: facts.tubeMax,
    coilDiameterMax: '600 mm',
    coilLengthMax: '800 mm',
  });
  const { caseId } = await askForVerification(world.db, owner, id, {
    profile,
    commandId: world.command(),
    documents: [documentId],
  });
  return { id, owner, estimator: await member('estimator'), builder: await member('builder'), caseId };
}

export async function verifyShop(world: SeedWorld, admin: Actor, caseId: string): Promise<void> {
  const seen = await verificationCaseFor(world.db, admin, caseId);
  const today = dateIn('UTC', await businessNow(world.db));
  await verifyFabricator(world.db, admin, caseId, {
    version: seen.case.version,
    items: ['legal-entity', 'works-address'],
    untilDate: addDays(today, 540),
    reasons: '',
  });
}

/** Onboards the payout account on the stand-in, as the owner would on its page. */
export async function onboardPayouts(world: SeedWorld, shop: Shop, country: string): Promise<void> {
  await openOnboarding(world.db, shop.owner, { companyId: shop.id, country });
  const account = await payoutAccountOf(world.db, shop.id);
  if (!account?.accountId) throw new Error('the payout account was not made');
  await world.control(`accounts/${account.accountId}/activate`);
  await refreshPayoutAccount(world.db, shop.owner, { companyId: shop.id });
}

export async function makeAdmin(world: SeedWorld, name: string, email: string): Promise<Actor> {
  const person = await world.person(name, email);
  await setAdmin(world.db, email, true);
  const { secret } = await enrolSecondFactor(world.db, world.auth, person.userId);
  const line = world.signIns.at(-1);
  if (line) line.note = `second factor, authenticator secret ${secret}`;
  return world.actor(person.userId);
}
