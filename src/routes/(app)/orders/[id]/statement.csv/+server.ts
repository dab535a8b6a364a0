import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { statementCsv } from '$lib/server/money/index.ts';
import type { RequestHandler } from './$types.ts';

export const GET: RequestHandler = (event) =>
  loading(async () => {
    const text = await statementCsv(database(), actorOf(event), event.params.id);
    return new Response(text, {
      headers: {
        'content-type': 'text/csv; charset=utf-8',
        'content-disposition': 'attachment; filename="statement.csv"',
        'cache-control': 'no-store',
      },
    });
  });
