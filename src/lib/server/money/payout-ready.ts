import { eq } from 'drizzle-orm';
import type { Reader } from '../db/index.ts';
import { payoutAccount } from '../db/schema/money.ts';

/** Whether a fabricator's payout account can receive money, as the payment service last said. */
export async function payoutReady(reader: Reader, companyId: string): Promise<boolean> {
  const [row] = await reader
    .select({ state: payoutAccount.state })
    .from(payoutAccount)
    .where(eq(payoutAccount.companyId, companyId));
  return row?.state === 'ready';
}
