/** Least number of characters of a password. */
export const PASSWORD_LENGTH = 12;
const LONGEST = 256;
const FEWEST_DISTINCT = 5;

/** What nearly everybody tries first; compared after digits and punctuation at the ends are taken off. */
const TOO_COMMON = new Set([
  'password',
  'passwordpassword',
  'passwort',
  'qwertyuiop',
  'letmein',
  'welcome',
  'rivenmark'
]);

const ZERO = 48;
const NINE = 57;

/** The character code after `code` when counting up or down; digits wrap between 9 and 0. */
function follower(code: number, step: 1 | -1): number {
  if (code === NINE && step === 1) return ZERO;
  return code === ZERO && step === -1 ? NINE : code + step;
}

/** "abcdefghijkl", "1234567890", "987654321098": each character follows the one before it. */
function isSequence(text: string): boolean {
  const codes = [...text.toLowerCase()].map((c) => c.codePointAt(0) ?? 0);
  return ([1, -1] as const).some((step) => codes.slice(1).every((code, i) => code === follower(codes[i], step)));
}

/**
 * What is wrong with a password that somebody wants to use, in words, or null. Length and guessability count, kinds of
 * characters do not (NIST SP 800-63B, section 5.1.1.2).
 * @param email address of the account, where it is known
 */
export function passwordFlaw(password: string, email?: string): string | null {
  const length = [...password].length;
  if (length < PASSWORD_LENGTH)
    return `A password needs at least ${PASSWORD_LENGTH} characters; this one has ${length}.`;
  if (length > LONGEST) return `A password has at most ${LONGEST} characters.`;
  const lower = password.toLowerCase();
  if (email && (lower.includes(email.toLowerCase()) || lower === email.toLowerCase().split('@')[0]))
    return 'A password cannot be, or hold, the e-mail address of the account.';
  if (new Set(lower).size < FEWEST_DISTINCT)
    return `A password needs at least ${FEWEST_DISTINCT} different characters. A few unrelated words work well.`;
  if (isSequence(password))
    return 'A run of neighbouring letters or digits is guessed at once. Take a few unrelated words.';
  if (TOO_COMMON.has(lower.replace(/^[^a-z]+|[^a-z]+$/g, '')))
    return 'This password is among the first that are tried. Take a few unrelated words.';
  return null;
}
