import { describe, expect, it } from 'vitest';
import { invitationMail, resetMail, reviewRequestMail, verdictMail } from './templates';

const expiresAt = new Date('2027-03-04T05:06:00Z');

describe('mails', () => {
  it('carry the link in both forms', () => {
    const link = 'http://127.0.0.1:4173/reset?token=abc&x=1';
    const mail = resetMail({ name: 'annotator', link, expiresAt });
    expect(mail.text).toContain(`\n${link}\n`);
    expect(mail.html).toContain('href="http://127.0.0.1:4173/reset?token=abc&amp;x=1"');
    expect(mail.text).toContain('4 March 2027 at 05:06 UTC');
  });
  it('escape what people typed', () => {
    const group = '<script>alert("x")</script> & \'co\'';
    const mail = invitationMail({ group, invitedBy: '<b>lead</b>', role: 'lead', link: 'http://h/', expiresAt });
    expect(mail.html).not.toMatch(/<script|<b>/);
    expect(mail.html).toContain('&lt;script&gt;alert(&quot;x&quot;)&lt;/script&gt; &amp; &#39;co&#39;');
  });
  it('keep the subject on one line', () => {
    const invitation = { group: 'A\r\nBcc: x@y.test', invitedBy: 'lead', role: 'lead' as const, link: 'http://h/' };
    expect(invitationMail({ ...invitation, expiresAt }).subject).toBe('Invitation to the group A Bcc: x@y.test');
  });
  it('say what is asked and what was decided', () => {
    const about = { tree: 'Unknown A, m/z 361.1758', study: 'Shore', revision: 4, link: 'http://h/' };
    const ask = reviewRequestMail({ ...about, reviewer: 'reviewer', askedBy: 'annotator', message: 'Please.' });
    expect(ask.text).toContain(
      'annotator asks for your review of Unknown A, m/z 361.1758 (study "Shore"), revision 4.'
    );
    const verdict = { ...about, receiver: 'annotator', reviewer: 'reviewer', reason: 'The loss at 204.' };
    expect(verdictMail({ ...verdict, verdict: 'ask-for-changes' }).text).toContain('asks for changes to revision 4');
    expect(verdictMail({ ...verdict, verdict: 'approve' }).subject).toMatch(/^Approved: /);
  });
});
