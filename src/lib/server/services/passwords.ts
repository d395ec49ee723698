import { hash, verify, type Options } from '@node-rs/argon2';
import { passwordFlaw } from '$lib/schema/password-rules';
import { ServiceError } from '../errors';

// argon2id is the library's default algorithm; the costs are the first choice of the OWASP password storage cheat sheet.
const COSTS: Options = { memoryCost: 19_456, timeCost: 2, parallelism: 1, outputLen: 32 };

/** Two ways of typing the same character must give the same password (NIST SP 800-63B, 5.1.1.2). */
const normalised = (password: string) => password.normalize('NFKC');

/** @returns argon2id hash in PHC form */
export const hashPassword = (password: string): Promise<string> => hash(normalised(password), COSTS);

let nobody: Promise<string> | null = null;

/**
 * Checks a password. For an unknown account pass null: the same work is done against a hash nobody knows the password
 * of, so that the time of the answer does not tell whether the account exists.
 */
export async function verifyPassword(stored: string | null, password: string): Promise<boolean> {
  const against = stored ?? (await (nobody ??= hashPassword(crypto.randomUUID())));
  const fits = await verify(against, normalised(password));
  return fits && stored !== null;
}

/** @throws ServiceError invalid with details.field, when the password breaks a rule */
export function requireGoodPassword(password: string, email: string): void {
  const flaw = passwordFlaw(password, email);
  if (flaw) throw new ServiceError('invalid', flaw, null, { field: 'password' });
}
