import { readFileSync } from 'node:fs';
import { z } from 'zod';

const infoSchema = z.object({
  origin: z.url(),
  mailUrl: z.url(),
  paymentsUrl: z.url(),
  objectsUrl: z.url(),
  dataDir: z.string(),
  env: z.record(z.string(), z.string()),
  pids: z.object({ stack: z.number(), app: z.number(), worker: z.number(), mail: z.number() }),
});
export type StackInfo = z.output<typeof infoSchema>;

let known: StackInfo | undefined;

/**
 * The stack that the tests run against, as `src/cli/stack.ts --ready-file FILE` wrote it; the test runner names
 * the file in COILYARD_STACK.
 */
export function stackInfo(): StackInfo {
  if (known !== undefined) return known;
  const file = process.env['COILYARD_STACK'];
  if (file === undefined)
    throw new Error('COILYARD_STACK names the ready file of a running stack; `npm test` sets it.');
  known = infoSchema.parse(JSON.parse(readFileSync(file, 'utf8')));
  return known;
}
