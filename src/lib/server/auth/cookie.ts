import type { Cookies } from '@sveltejs/kit';
import { lucia } from './session';

/** Gives the browser the cookie of a new session. */
export function setSessionCookie(cookies: Cookies, sessionId: string): void {
  const cookie = lucia().createSessionCookie(sessionId);
  cookies.set(cookie.name, cookie.value, { path: '/', ...cookie.attributes });
}

export function clearSessionCookie(cookies: Cookies): void {
  const cookie = lucia().createBlankSessionCookie();
  cookies.set(cookie.name, cookie.value, { path: '/', ...cookie.attributes });
}
