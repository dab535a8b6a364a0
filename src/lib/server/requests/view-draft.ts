import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { can, requireAccess } from '../access/index.ts';
import { latestCheck } from '../checks/index.ts';
import type { Reader } from '../db/index.ts';
import type { DraftForm } from '../db/schema/requests.ts';
import { unsafeCheckView, type DraftCheck } from './check-draft.ts';
import { requestForUpdate, unsafeRequestFiles, type RequestFileView } from './queries.ts';

export interface DraftView {
  id: string;
  companyId: string;
  number: number;
  form: DraftForm;
  machineId: string | null;
  machineVersion: number | null;
  version: number;
  savedAt: number;
  mayPost: boolean;
  files: RequestFileView[];
  /** The newest stored check; it counts only while its `requestVersion` is the draft's version. */
  check: DraftCheck | null;
}

/** A draft for the composer; who may only read gets not-allowed, posted ones are a state conflict. */
export async function viewDraft(reader: Reader, actor: Actor, id: string): Promise<DraftView> {
  const row = await requestForUpdate(reader, id);
  requireAccess(actor, 'request.edit', { companyId: row.companyId });
  if (row.state !== 'draft') {
    throw new AppError('state-conflict', { detail: 'This request is posted and can no longer be edited.' });
  }
  const check = await latestCheck(reader, id);
  return {
    id: row.id,
    companyId: row.companyId,
    number: row.number,
    form: row.form,
    machineId: row.machineId,
    machineVersion: row.machineVersion,
    version: row.version,
    savedAt: row.updatedAt,
    mayPost: can(actor, 'request.post', { companyId: row.companyId }),
    files: await unsafeRequestFiles(reader, id),
    check: check ? await unsafeCheckView(reader, check) : null,
  };
}
