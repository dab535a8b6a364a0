import { database } from '$lib/server/db/index.ts';
import { listDisputes } from '$lib/server/disputes/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const show = event.url.searchParams.get('show') === 'closed' ? 'closed' : 'open';
    const rows = await listDisputes(database(), actor, show);
    return {
      show: show as 'open' | 'closed',
      zone: actor.timeZone,
      disputes: rows.map((row) => ({
        id: row.id,
        state: row.state,
        reason: row.reason,
        orderNumber: row.orderNumber,
        title: row.title,
        currency: row.currency,
        amountClaimed: row.amountClaimed,
        buyerName: row.buyerName,
        fabricatorName: row.fabricatorName,
        openedAt: row.openedAt,
        answerDueAt: row.answerDueAt,
        decisionDueAt: row.decisionDueAt,
        appealUntil: row.appealUntil,
      })),
    };
  });
