import { z } from 'zod';
import { defineJob } from '../jobs/index.ts';

/** One heating run. Resuming it is running it again from its start. */
export const heatingJob = defineJob({
  kind: 'heating',
  schema: z.object({ heatingId: z.string() }),
  maxAttempts: 3,
  leaseMs: 15_000,
  long: true,
  handler: async () => (await import('./heating-handler.ts')).runHeatingJob,
});
