import { ServiceError } from '../errors';
import type { Actor } from './authorize';

/** The signed-in person, for acts on one's own account. @throws ServiceError unauthenticated */
export function requirePerson<A extends Actor>(actor: A | null): A {
  if (!actor) throw new ServiceError('unauthenticated', 'You are not signed in.', 'Sign in and try again.');
  return actor;
}
