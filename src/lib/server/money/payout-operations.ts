import { eq } from 'drizzle-orm';
import { z } from 'zod';
import type { PayeeAccount } from '../adapters/payments.ts';
import { payoutAccount } from '../db/schema/money.ts';
import { raiseAlarm } from './alarms.ts';
import type { OperationHandler } from './handler.ts';
import { metadataOf } from './operations.ts';
import { applyAccount } from './payout-accounts.ts';

const request = z.object({
  companyId: z.string(),
  displayName: z.string(),
  contactEmail: z.string(),
  country: z.string().length(2),
});

/** Makes the account that a fabricator is paid to. */
export const payoutAccountHandler: OperationHandler<PayeeAccount> = {
  call(payments, op) {
    const given = request.parse(op.request);
    return payments.createAccount({
      idempotencyKey: op.key,
      displayName: given.displayName,
      contactEmail: given.contactEmail,
      country: given.country,
      metadata: { ...metadataOf(op), company: given.companyId },
    });
  },

  // Accounts cannot be searched by metadata; the same key answers, and an account without money harms nobody.
  find: () => Promise.resolve(undefined),

  async apply(tx, op, account) {
    const given = request.parse(op.request);
    await tx
      .update(payoutAccount)
      .set({ accountId: account.id })
      .where(eq(payoutAccount.companyId, given.companyId));
    await applyAccount(tx, account);
    return { objectId: account.id, result: { transfers: account.transfers } };
  },

  async refused(tx, op, error) {
    const given = request.parse(op.request);
    await raiseAlarm(tx, {
      key: `account-refused:${op.id}`,
      kind: 'account-refused',
      objectId: given.companyId,
      detail: `The payment service refused to make a payout account: ${error.message}`,
    });
  },
};
