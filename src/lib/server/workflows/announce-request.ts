import { z } from 'zod';
import { defineJob } from '../jobs/index.ts';

/** Tells every verified fabricator of a posted request; a job, so that posting stays quick with thousands of them. */
export const announceRequest = defineJob({
  kind: 'announce-request',
  schema: z.object({ requestId: z.string() }),
  maxAttempts: 10,
  leaseMs: 60_000,
  handler: async () => (await import('./announce-request-handler.ts')).tellFabricators,
});
