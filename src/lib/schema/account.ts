import { z } from 'zod';
import { passwordFlaw } from './password-rules';

/** An e-mail address in the form in which it is stored: trimmed and in lower case. */
export const emailSchema = z
  .string()
  .trim()
  .toLowerCase()
  .max(254, 'An e-mail address has at most 254 characters.')
  .pipe(z.email('Write a complete e-mail address, such as name@institute.example.'));

const givenPassword = z.string().min(1, 'Enter your password.').max(256, 'A password has at most 256 characters.');

/** A password that is chosen now; `passwordFlaw` is asked again by the service, which knows the address. */
const chosenPassword = z.string().superRefine((password, context) => {
  const flaw = passwordFlaw(password);
  if (flaw) context.addIssue({ code: 'custom', message: flaw });
});

export const personNameSchema = z
  .string()
  .trim()
  .min(2, 'Write your name with at least two characters.')
  .max(120, 'A name has at most 120 characters.')
  .refine((name) => !/\p{Cc}/u.test(name), 'A name cannot hold control characters.');

export const signInSchema = z.object({ email: emailSchema, password: givenPassword });
export type SignIn = z.infer<typeof signInSchema>;

export const forgotSchema = z.object({ email: emailSchema });

/** The secret of a link sent by mail: 32 random bytes in base64url. */
export const secretSchema = z.string().regex(/^[A-Za-z0-9_-]{43}$/, 'This link is not complete.');

/** A chosen password typed twice. */
const twice = { password: chosenPassword, again: z.string() };
const equal = (input: { password: string; again: string }) => input.password === input.again;
const unequal = { path: ['again'], message: 'The two passwords differ.' };

export const resetSchema = z.object({ token: secretSchema, ...twice }).refine(equal, unequal);
export const joinSchema = z.object({ token: secretSchema, name: personNameSchema, ...twice }).refine(equal, unequal);
export type Join = z.infer<typeof joinSchema>;
export const acceptSchema = z.object({ token: secretSchema });

export const profileSchema = z.object({ name: personNameSchema });
export const changePasswordSchema = z.object({ current: givenPassword, ...twice }).refine(equal, unequal);
export type ChangePassword = z.infer<typeof changePasswordSchema>;

/** A session is named by the SHA-256 of its id, so that the id itself never stands in a page. */
export const endSessionSchema = z.object({ session: z.string().regex(/^[0-9a-f]{64}$/, 'This session is not known.') });
export const noInputSchema = z.object({});
