import { existsSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { z } from 'zod';

const signInsSchema = z.array(
  z.object({ role: z.string(), email: z.string(), password: z.string(), note: z.string().optional() }),
);
export type SignIn = z.output<typeof signInsSchema>[number];

/** What the seed wrote for people to sign in with; empty when there is no seed. */
export function readSignIns(dataDir: string): SignIn[] {
  const file = path.join(dataDir, 'sign-ins.json');
  if (!existsSync(file)) return [];
  return signInsSchema.parse(JSON.parse(readFileSync(file, 'utf8')));
}

/** A table in plain text, one line per sign-in. */
export function signInTable(signIns: SignIn[]): string {
  const width = (pick: (one: SignIn) => string) => Math.max(...signIns.map((one) => pick(one).length));
  const role = width((one) => one.role);
  const email = width((one) => one.email);
  const password = width((one) => one.password);
  return signIns
    .map((one) =>
      `  ${one.role.padEnd(role)}  ${one.email.padEnd(email)}  ${one.password.padEnd(password)}  ${one.note ?? ''}`.trimEnd(),
    )
    .join('\n');
}

/**
 * Signs in over HTTP as a browser without scripts does: the page's form, then the desk with the cookie. Throws
 * with what went wrong.
 */
export async function trySignIn(origin: string, signIn: SignIn): Promise<void> {
  const page = await fetch(`${origin}/sign-in`, { redirect: 'manual' });
  await page.text();
  if (page.status !== 200) throw new Error(`${origin}/sign-in answered ${String(page.status)}.`);
  const answer = await fetch(`${origin}/sign-in`, {
    method: 'POST',
    redirect: 'manual',
    headers: { origin, 'content-type': 'application/x-www-form-urlencoded', accept: 'text/html' },
    body: new URLSearchParams({ email: signIn.email, password: signIn.password }),
  });
  await answer.text();
  const cookies = answer.headers.getSetCookie().map((cookie) => cookie.split(';')[0] ?? '');
  const session = cookies.find((cookie) => cookie.startsWith('__Host-coilyard=') && cookie.length > 30);
  const next = new URL(answer.headers.get('location') ?? '/desk', origin);
  // Who has a second factor is asked for it first; their session comes after.
  const secondFactor = next.pathname === '/two-factor' && cookies.length > 0;
  if (answer.status !== 303 || (session === undefined && !secondFactor)) {
    throw new Error(`Signing in as ${signIn.role} was answered ${String(answer.status)} and no session.`);
  }
  const desk = await fetch(next, {
    headers: { cookie: cookies.join('; ') },
    redirect: 'manual',
  });
  await desk.text();
  if (desk.status !== 200) throw new Error(`The page after signing in answered ${String(desk.status)}.`);
}
