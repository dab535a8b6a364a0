import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { z } from 'zod';
import { config } from '../config/index.ts';

const signIns = z.array(
  z.object({ role: z.string(), email: z.string(), password: z.string(), note: z.string().optional() }),
);
export type DemoSignIn = z.output<typeof signIns>[number];

/** The sign-ins that the seed wrote, in mode demo only; nothing anywhere else. */
export function demoSignIns(): DemoSignIn[] {
  if (config().mode !== 'demo') return [];
  const file = path.join(config().dataDir, 'sign-ins.json');
  if (!existsSync(file)) return [];
  const parsed = signIns.safeParse(JSON.parse(readFileSync(file, 'utf8')));
  return parsed.success ? parsed.data : [];
}
