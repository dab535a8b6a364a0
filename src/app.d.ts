import type { Actor } from '$lib/domain/actor.ts';
import type { SessionState } from '$lib/server/auth/index.ts';

declare global {
  namespace App {
    interface Error {
      message: string;
      code?: string;
      requestId?: string;
    }
    interface Locals {
      /** The signed-in person with all memberships; null for visitors and on pages without a session. */
      actor: Actor | null;
      session: SessionState | null;
      sessionId: string | null;
      requestId: string;
      /** Where the request comes from, proxies taken into account. */
      address: string;
    }
  }
}

export {};
