import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { can, requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import type { DraftForm } from '../db/schema/requests.ts';
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
}

/** A draft for the composer; who may only read gets not-allowed, posted ones are a state conflict. */
export async function viewDraft(reader: Reader, actor: Actor, id: string): Promise<DraftView> {
  const row = await requestForUpdate(reader, id);
  requireAccess(actor, 'request.edit', { companyId: row.companyId });
  if (row.state !== 'draft') {
    throw new AppError('state-conflict', { detail: 'This request is posted and can no longer be edited.' });
  }
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
  };
}
