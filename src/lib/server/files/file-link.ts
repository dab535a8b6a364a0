import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { fileRow, mayRead } from './access.ts';
import { objectStore, type ObjectStore } from './store.ts';

const linkSeconds = 60;

/**
 * A signed link to a clean file for someone who may read it, good for a minute. Anything else, pending
 * and refused files too, is "not found". What an admin reads is told in the audit trail.
 */
export async function fileLink(
  db: Database,
  actor: Actor,
  fileId: string,
  store: ObjectStore = objectStore(),
): Promise<{ url: string; name: string }> {
  const row = await fileRow(db, fileId);
  const as = await mayRead(db, actor, row);
  if (!as || row.state !== 'clean' || row.storageKey === null) throw new AppError('not-found');
  const { storageKey, name, contentType } = row;
  if (as === 'admin') {
    await transact(db, (tx) =>
      audit(tx, actor, {
        action: 'file.read-by-admin',
        subjectType: 'file',
        subjectId: row.id,
        companyId: row.ownerCompanyId,
        detail: { name, purpose: row.purpose },
      }),
    );
  }
  const url = await store.presignGet({
    key: storageKey,
    fileName: name,
    contentType,
    expiresInSeconds: linkSeconds,
  });
  return { url, name };
}
