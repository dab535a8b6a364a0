import type { Actor } from '$lib/domain/actor.ts';

declare global {
  namespace App {
    interface Error {
      message: string;
      code?: string;
      requestId?: string;
    }
    interface Locals {
      actor: Actor | null;
      sessionId: string | null;
      requestId: string;
    }
  }
}

export {};
