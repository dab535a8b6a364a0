import { randomUUID } from 'node:crypto';
import { desc, eq } from 'drizzle-orm';
import type { Actor } from '../../lib/domain/actor.ts';
import { dayMs } from '../../lib/domain/dates.ts';
import type { FilePurpose } from '../../lib/domain/files.ts';
import type { Role } from '../../lib/domain/roles.ts';
import { businessNow, moveClock } from '../../lib/server/adapters/clock.ts';
import { createMailer } from '../../lib/server/adapters/mailer.ts';
import { newId } from '../../lib/server/adapters/ids.ts';
import { actorOfUser, createAuth, createVerifiedPerson, type Auth } from '../../lib/server/auth/index.ts';
import { acceptInvitation, invitationsTo, invite } from '../../lib/server/companies/index.ts';
import { config } from '../../lib/server/config/index.ts';
import type { Database } from '../../lib/server/db/index.ts';
import { user } from '../../lib/server/db/schema/auth.ts';
import { paymentSession } from '../../lib/server/db/schema/money.ts';
import { finishUpload, startUpload } from '../../lib/server/files/index.ts';
import { backfillEvents } from '../../lib/server/money/index.ts';
import { drainJobs } from '../../lib/server/workflows/run-worker.ts';

/** One password for every demo sign-in; the demo says so. */
export const demoPassword = 'bent-copper-tube-8x1';

export interface SignInLine {
  role: string;
  email: string;
  password: string;
  note?: string;
}

/**
 * What the seed acts with: real use-cases, the running stand-ins, and a business clock that is set back
 * so that the story has a past. Nothing is written round the use-cases, so ledger, payment service,
 * mail and files agree.
 */
export class SeedWorld {
  readonly db: Database;
  readonly auth: Auth;
  readonly signIns: SignInLine[] = [];
  readonly #mailer = createMailer(config().mail);
  readonly #realStart = Date.now();

  constructor(db: Database) {
    this.db = db;
    this.auth = createAuth({ db, config: config() });
  }

  /** Sets business time to so many days before now (fractions allowed). Time only goes forward. */
  async daysAgo(days: number): Promise<void> {
    const target = this.#realStart - days * dayMs;
    await moveClock(this.db, target - (await businessNow(this.db)));
  }

  /** Ends with business time being real time. */
  async today(): Promise<void> {
    await moveClock(this.db, Date.now() - (await businessNow(this.db)));
  }

  async person(name: string, email: string, note?: string, set: Partial<typeof user.$inferInsert> = {}) {
    const id = await createVerifiedPerson(this.db, this.auth, { name, email, password: demoPassword });
    if (Object.keys(set).length > 0) await this.db.update(user).set(set).where(eq(user.id, id));
    this.signIns.push({ role: name, email, password: demoPassword, ...(note ? { note } : {}) });
    return this.actor(id);
  }

  /** The person as they are now, with fresh memberships. */
  async actor(userId: string): Promise<Actor> {
    const [row] = await this.db.select().from(user).where(eq(user.id, userId));
    if (!row) throw new Error(`no person ${userId}`);
    return actorOfUser(this.db, row, null);
  }

  /** Invites a person and lets them accept. */
  async join(owner: Actor, companyId: string, person: Actor, roles: readonly Role[]): Promise<Actor> {
    await invite(this.db, owner, { companyId, email: person.email, roles });
    const [open] = await invitationsTo(this.db, person);
    if (!open) throw new Error('the invitation did not arrive');
    await acceptInvitation(this.db, person, open.id);
    return this.actor(person.userId);
  }

  /** Uploads bytes the way the browser does: slot, signed PUT, verification by the server. */
  async upload(
    actor: Actor,
    companyId: string,
    purpose: FilePurpose,
    name: string,
    contentType: string,
    content: Buffer,
  ): Promise<string> {
    const slot = await startUpload(this.db, actor, {
      companyId,
      purpose,
      name,
      contentType,
      size: content.byteLength,
    });
    if (slot.mode !== 'single') throw new Error('the demo’s files are small');
    const answer = await fetch(slot.url, {
      method: slot.method,
      headers: slot.headers,
      body: new Uint8Array(content),
    });
    if (!answer.ok) throw new Error(`upload of ${name}: ${answer.status}`);
    await finishUpload(this.db, actor, slot.fileId, { parts: [] });
    return slot.fileId;
  }

  async control(path: string, body: unknown = {}): Promise<void> {
    const answer = await fetch(`${config().payments.apiBase}/_control/${path}`, {
      method: 'POST',
      body: JSON.stringify(body),
    });
    if (!answer.ok) throw new Error(`${path}: ${answer.status} ${await answer.text()}`);
  }

  /** Pays the open payment page of a milestone with a test card. */
  async payPage(milestoneId: string): Promise<void> {
    const [session] = await this.db
      .select()
      .from(paymentSession)
      .where(eq(paymentSession.milestoneId, milestoneId))
      .orderBy(desc(paymentSession.attempt))
      .limit(1);
    if (!session?.sessionId) throw new Error('no payment page is open');
    await this.control(`sessions/${session.sessionId}/pay`);
    await this.settle();
  }

  /** Takes in what the payment service tells, does every due job and deadline, sends every mail. */
  async settle(): Promise<void> {
    for (let round = 0; round < 10; round += 1) {
      const fresh = await backfillEvents(this.db);
      await drainJobs(this.db, { send: (mail) => this.#mailer.send(mail) });
      if (fresh === 0) return;
    }
  }

  command(): string {
    return randomUUID();
  }

  id(): string {
    return newId();
  }
}
