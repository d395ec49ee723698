import type { SessionUser } from '$lib/server/auth/session';

declare global {
  namespace App {
    interface Locals {
      /** The signed-in person, or null for a stranger. Decides nothing by itself: services ask `authorize`. */
      user: SessionUser | null;
      sessionId: string | null;
    }
    interface Error {
      message: string;
      /** What a person can quote to an operator; the log holds the details under it. */
      reference?: string;
      /** What the person can do about it. */
      cure?: string;
    }
  }
}

export {};
