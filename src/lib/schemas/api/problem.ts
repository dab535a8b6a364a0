import { z } from 'zod';

/** Every error under /api, as application/problem+json (RFC 9457). */
export const problemSchema = z
  .object({
    type: z.string(),
    title: z.string().describe('What kind of error it is, in words'),
    status: z.int(),
    code: z.string().describe('Stable name of the error'),
    detail: z.string().describe('What happened here'),
    fields: z.record(z.string(), z.string()).describe('Messages by field path'),
    requestId: z.string().describe('Names the request in our logs'),
  })
  .describe('An error');
