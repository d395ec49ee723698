import { describe, expect, it } from 'vitest';
import { changePasswordSchema, emailSchema, joinSchema, signInSchema } from './account';
import { ownPath } from './next-path';
import { passwordFlaw } from './password-rules';

describe('ownPath', () => {
  it('keeps paths of this site with their query', () => {
    expect(ownPath('/studies/1?tab=runs#top')).toBe('/studies/1?tab=runs#top');
  });
  it.each([
    'https://elsewhere.example/',
    '//elsewhere.example/',
    '/\\elsewhere.example/',
    '/\t/elsewhere.example',
    '/.//elsewhere.example',
    '/a/..//elsewhere.example',
    'javascript:alert(1)',
    'studies',
    '',
    '/' + 'a'.repeat(3000)
  ])('refuses %j', (next) => {
    expect(ownPath(next)).toBe('/');
  });
  it('falls back where told to', () => {
    expect(ownPath(null, '/sign-in')).toBe('/sign-in');
  });
});

describe('passwordFlaw', () => {
  it.each([
    'eleven char',
    'aaaaaaaaaaaaaa',
    'abababababab',
    '123456789012',
    'abcdefghijkl',
    'Password1234!',
    'x'.repeat(300)
  ])('finds fault with %j', (password) => {
    expect(passwordFlaw(password)).toMatch(/password|guessed/i);
  });
  it('accepts words, and counts characters rather than bytes', () => {
    expect(passwordFlaw('copper kettle under glass')).toBeNull();
    expect(passwordFlaw('äöüßéèêâîôûñ')).toBeNull();
  });
  it('refuses the address of the account in any case', () => {
    expect(passwordFlaw('Somebody@Rivenmark.test', 'somebody@rivenmark.test')).toContain('e-mail address');
    expect(passwordFlaw('my somebody@rivenmark.test', 'somebody@rivenmark.test')).toContain('e-mail address');
    expect(passwordFlaw('somebody-long-name', 'somebody-long-name@rivenmark.test')).toContain('e-mail address');
  });
});

describe('forms', () => {
  it('bring addresses to the stored form', () => {
    expect(emailSchema.parse('  Some.Body@Rivenmark.TEST ')).toBe('some.body@rivenmark.test');
  });
  it('refuse addresses with a list or a line break in them', () => {
    for (const bad of ['a@b.test, c@d.test', 'a@b.test\nbcc: c@d.test', 'name <a@b.test>', 'a@b'])
      expect(emailSchema.safeParse(bad).success, bad).toBe(false);
  });
  it('do not judge the strength of a password that is only checked', () => {
    expect(signInSchema.safeParse({ email: 'a@b.test', password: 'old' }).success).toBe(true);
  });
  it('place a difference at the second password', () => {
    const input = { current: 'x', password: 'copper kettle under glass', again: 'copper kettle' };
    expect(changePasswordSchema.safeParse(input).error?.issues.map(({ path }) => path)).toEqual([['again']]);
  });
  it('refuse a name with control characters and a link with a wrong secret', () => {
    const result = joinSchema.safeParse({ token: 'x', name: 'a\nb', password: 'copper kettle under glass', again: '' });
    expect(result.error?.issues.map(({ path }) => path[0])).toEqual(expect.arrayContaining(['token', 'name']));
  });
});
