import { DrizzleMySQLAdapter } from '@lucia-auth/adapter-drizzle';
import { Lucia } from 'lucia';
import { config } from '../config';
import { database } from '../db';
import { sessions, users } from '../db/schema';

/** What the request carries of the signed-in person. */
export interface SessionUser {
  id: string;
  email: string;
  name: string;
}

declare module 'lucia' {
  interface Register {
    Lucia: ReturnType<typeof makeLucia>;
    DatabaseUserAttributes: { email: string; name: string };
    DatabaseSessionAttributes: { userAgent: string; createdAt: Date };
  }
}

function makeLucia() {
  return new Lucia(new DrizzleMySQLAdapter(database(), sessions, users), {
    sessionCookie: { name: 'rivenmark_session', attributes: { secure: config().ORIGIN.startsWith('https:') } },
    getUserAttributes: ({ email, name }) => ({ email, name }),
    getSessionAttributes: ({ userAgent, createdAt }) => ({ userAgent, createdAt })
  });
}

let instance: ReturnType<typeof makeLucia> | null = null;

/** lucia over the sessions table. Cookies are HttpOnly and SameSite=Lax; Secure when ORIGIN is https. */
export const lucia = () => (instance ??= makeLucia());
