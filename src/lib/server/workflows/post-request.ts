import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { Commercial } from '../../domain/commercial.ts';
import { dateIn, endOfDate, formatWindowEnd } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { openFindings, type FindingAnswer } from '../../domain/finding-answers.ts';
import type { CheckResult, Requirement } from '../../induction/check/types.ts';
import { methodVersion } from '../../induction/version.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { answersOf, checkBody, checkById, requirementKey, resultOf, sha256Hex } from '../checks/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { requestFile, specification } from '../db/schema/requests.ts';
import { openFileToVerified, unsafeFileFacts } from '../files/index.ts';
import { enqueueJob } from '../jobs/index.ts';
import {
  requestForUpdate,
  searchWords,
  setRequestState,
  specificationText,
  writeToSearch,
  type RequestRow,
  type SpecificationFile,
  materialKey,
  tubeSize,
} from '../requests/index.ts';
import { announceRequest } from './announce-request.ts';

export interface PostRequestInput {
  requestId: string;
  /** The draft's version on the screen. */
  version: number;
  /** The stored check of exactly this version. */
  checkId: string;
}

interface Complete {
  requirement: Requirement;
  commercial: Commercial;
}

function requireComplete(row: RequestRow): Complete {
  const { requirement, commercial, title } = row;
  if (title === '' || requirement === null || commercial === null) {
    throw new AppError('invalid-input', {
      detail: 'The request is not complete yet. The list of sections shows what is missing.',
      fields: title === '' ? { title: 'Give the request a title.' } : {},
    });
  }
  return { requirement, commercial };
}

/** The stored check, if it is the one that counts: the server's own, of exactly this version. */
async function checkedResult(
  tx: Tx,
  row: RequestRow,
  requirement: Requirement,
  checkId: string,
): Promise<{ result: CheckResult; answers: FindingAnswer[] }> {
  const check = await checkById(tx, checkId);
  const current =
    check?.requestId === row.id &&
    check.state === 'done' &&
    check.setting !== 'preview' &&
    check.requestVersion === row.version &&
    check.methodVersion === methodVersion &&
    check.requirementHash === requirementKey(requirement).hash;
  if (!check || !current) {
    throw new AppError('state-conflict', {
      detail:
        'The check on record is not of this version of the draft. Let the server check it again, then post.',
    });
  }
  const result = resultOf(await checkBody(tx, check.id));
  const answers = await answersOf(tx, check.id);
  const open = openFindings(result.findings, answers);
  if (open.blockers.length > 0) {
    throw new AppError('state-conflict', {
      detail: `${open.blockers.length === 1 ? 'A blocker stands' : `${open.blockers.length} blockers stand`} in the way: ${open.blockers[0]?.message ?? ''}`,
    });
  }
  if (open.cautions.length > 0) {
    throw new AppError('state-conflict', {
      detail: `${open.cautions.length === 1 ? 'One caution is' : `${open.cautions.length} cautions are`} not acknowledged yet.`,
    });
  }
  return { result, answers };
}

async function frozenFiles(tx: Tx, requestId: string): Promise<SpecificationFile[]> {
  const rows = await tx.select().from(requestFile).where(eq(requestFile.requestId, requestId));
  const facts = await unsafeFileFacts(
    tx,
    rows.map((row) => row.fileId),
  );
  return rows.map(({ fileId, kind }) => {
    const fact = facts.find((one) => one.id === fileId);
    if (!fact) throw new AppError('state-conflict', { detail: 'A file is not verified yet.' });
    return { id: fileId, kind, name: fact.name, sha256: fact.sha256 };
  });
}

function closingOf(commercial: Commercial, zone: string, now: number): number {
  const closesAt = endOfDate(zone, commercial.closesOn);
  if (closesAt <= now) {
    const message = `Choose a day from ${dateIn(zone, now)} on: bids cannot close in the past.`;
    throw new AppError('invalid-input', { detail: message, fields: { 'commercial.closesOn': message } });
  }
  return closesAt;
}

/**
 * Posts a draft: freezes the numbered, hashed specification, opens its files to verified fabricators,
 * makes it findable and has the fabricators told. Runs no check: it names the stored one.
 */
export async function postRequest(
  db: Database,
  actor: Actor,
  input: PostRequestInput,
): Promise<{ specificationId: string; number: number; hash: string; closesAt: number }> {
  return transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.post', { companyId: row.companyId });
    requireVerifiedEmail(actor);
    if (row.state !== 'draft')
      throw new AppError('state-conflict', { detail: 'This request is posted already.' });
    if (row.version !== input.version) {
      throw new AppError('version-conflict', { data: { version: row.version } });
    }
    const { requirement, commercial } = requireComplete(row);
    const { result, answers } = await checkedResult(tx, row, requirement, input.checkId);
    const [buyer] = await tx
      .select({ name: company.name, timeZone: company.timeZone })
      .from(company)
      .where(eq(company.id, row.companyId));
    if (!buyer) throw new AppError('not-found');
    const now = await businessNow(tx);
    const closesAt = closingOf(commercial, buyer.timeZone, now);
    const files = await frozenFiles(tx, row.id);
    const body = specificationText({
      requestNumber: row.number,
      title: row.title,
      specificationNumber: 1,
      requirement,
      check: result,
      answers,
      commercial,
      files,
      frozenAt: now,
    });
    const specificationId = newId();
    const hash = sha256Hex(body);
    await tx.insert(specification).values({
      id: specificationId,
      requestId: row.id,
      number: 1,
      body,
      hash,
      checkId: input.checkId,
      createdAt: now,
      createdBy: actor.userId,
    });
    for (const file of files) await openFileToVerified(tx, file.id);
    await setRequestState(tx, actor, row, 'post', {
      expectedVersion: input.version,
      detail: { specificationId, hash, closes: formatWindowEnd(closesAt, buyer.timeZone) },
      set: {
        currentSpecificationId: specificationId,
        shape: requirement.coil.winding.shape,
        tubeSize: tubeSize(requirement),
        material: materialKey(requirement),
        quantity: commercial.quantity,
        postedAt: now,
        closesAt,
        buyerZone: buyer.timeZone,
      },
    });
    await writeToSearch(tx, row.id, row.title, searchWords(requirement, commercial, buyer.name));
    await enqueueJob(tx, announceRequest, { requestId: row.id }, { dedupeKey: row.id });
    return { specificationId, number: 1, hash, closesAt };
  });
}
