import { eq } from 'drizzle-orm';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { dayMs, endOfDate, formatInstant } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { verificationMachine, verificationMaxDays, verifiedItems } from '../../domain/verification.ts';
import type { refuseInput, verifyInput } from '../../schemas/forms/verification.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { audit } from '../audit/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { verificationCase } from '../db/schema/verification.ts';
import { transition } from '../db/transition.ts';
import { caseRow, standingCase, type CaseRow } from './read.ts';

interface Decision {
  event: 'verify' | 'refuse' | 'revoke';
  version: number;
  set: Partial<CaseRow>;
  detail: Record<string, unknown>;
}

async function decide(tx: Tx, actor: Actor, row: CaseRow, decision: Decision): Promise<void> {
  await transition(tx, {
    machine: verificationMachine,
    table: verificationCase,
    column: verificationCase.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event: decision.event,
    by: actor,
    companyId: row.companyId,
    set: { decidedBy: actor.userId, decidedAt: await businessNow(tx), ...decision.set },
    detail: decision.detail,
    expectedVersion: decision.version,
  });
}

async function setVerifiedUntil(
  tx: Tx,
  actor: Actor,
  companyId: string,
  until: number | null,
): Promise<void> {
  await tx.update(company).set({ verifiedUntil: until }).where(eq(company.id, companyId));
  await audit(tx, actor, {
    action: 'company.verified-until',
    subjectType: 'company',
    subjectId: companyId,
    companyId,
    detail: { until },
  });
}

function pathOf(companyId: string): string {
  return `/companies/${companyId}/verification`;
}

/** Verifies a fabricator until the end of a date in its own time zone, and says what exactly was verified. */
export async function verifyFabricator(
  db: Database,
  actor: Actor,
  caseId: string,
  input: z.output<typeof verifyInput>,
): Promise<void> {
  requireAccess(actor, 'admin.verify');
  await transact(db, async (tx) => {
    const row = await caseRow(tx, caseId);
    const [about] = await tx
      .select({ name: company.name, timeZone: company.timeZone })
      .from(company)
      .where(eq(company.id, row.companyId));
    const zone = about?.timeZone ?? 'UTC';
    const until = endOfDate(zone, input.untilDate);
    const now = await businessNow(tx);
    if (until <= now || until > now + verificationMaxDays * dayMs) {
      const message = 'Choose a date after today and within three years.';
      throw new AppError('invalid-input', { detail: message, fields: { untilDate: message } });
    }
    await decide(tx, actor, row, {
      event: 'verify',
      version: input.version,
      set: { verifiedItems: input.items, verifiedUntil: until, reasons: input.reasons || null },
      detail: { items: input.items, until },
    });
    await setVerifiedUntil(tx, actor, row.companyId, until);
    await notifyCompany(tx, row.companyId, 'all', {
      kind: 'fabricator-verified',
      subject: 'Your company is verified',
      content: {
        heading: `${about?.name ?? 'Your company'} is verified`,
        paragraphs: [
          'You can see open requests on the board, ask questions and bid.',
          ...(input.reasons ? [input.reasons] : []),
        ],
        facts: [
          ['Holds until', formatInstant(until - 1, zone, false)],
          ['What was verified', input.items.map((item) => verifiedItems[item]).join('; ')],
        ],
        action: { label: 'See your verification', path: pathOf(row.companyId) },
      },
      about: { type: 'verification', id: row.id },
      href: pathOf(row.companyId),
      dedupeKey: `fabricator-verified/${row.id}`,
    });
  });
}

async function tellRefused(
  tx: Tx,
  row: CaseRow,
  words: { subject: string; heading: string; after: string },
  reasons: string,
) {
  await notifyCompany(tx, row.companyId, ['owner'], {
    kind: 'fabricator-refused',
    subject: words.subject,
    content: {
      heading: words.heading,
      paragraphs: [words.after],
      facts: [['Reasons', reasons]],
      action: { label: 'See the reasons and ask again', path: pathOf(row.companyId) },
    },
    about: { type: 'verification', id: row.id },
    href: pathOf(row.companyId),
    dedupeKey: `fabricator-refused/${row.id}/${row.version}`,
  });
}

/** Refuses an asking with reasons. A verification given before stays until its date; it may be asked again. */
export async function refuseFabricator(
  db: Database,
  actor: Actor,
  caseId: string,
  input: z.output<typeof refuseInput>,
): Promise<void> {
  requireAccess(actor, 'admin.verify');
  await transact(db, async (tx) => {
    const row = await caseRow(tx, caseId);
    await decide(tx, actor, row, {
      event: 'refuse',
      version: input.version,
      set: { reasons: input.reasons },
      detail: { reasons: input.reasons },
    });
    await tellRefused(
      tx,
      row,
      {
        subject: 'Your company was not verified',
        heading: 'We could not verify your company yet',
        after: 'You can put right what is named below and ask again at any time.',
      },
      input.reasons,
    );
  });
}

/** Ends a verification before its date, with reasons: no new bids from then on. */
export async function revokeVerification(
  db: Database,
  actor: Actor,
  caseId: string,
  input: z.output<typeof refuseInput>,
): Promise<void> {
  requireAccess(actor, 'admin.verify');
  await transact(db, async (tx) => {
    const row = await caseRow(tx, caseId);
    await decide(tx, actor, row, {
      event: 'revoke',
      version: input.version,
      set: { reasons: input.reasons },
      detail: { reasons: input.reasons },
    });
    // An older case may still stand; what holds is the newest that does.
    const standing = await standingCase(tx, row.companyId);
    await setVerifiedUntil(tx, actor, row.companyId, standing?.verifiedUntil ?? null);
    await tellRefused(
      tx,
      row,
      {
        subject: 'Your verification was ended',
        heading: 'The verification of your company was ended',
        after: 'Running orders go on. New bids need a new verification, which you can ask for.',
      },
      input.reasons,
    );
  });
}
