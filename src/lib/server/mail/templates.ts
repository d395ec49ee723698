import type { Role } from '$lib/schema/group';
import { renderMail, type MailMessage } from './message';

const when = new Intl.DateTimeFormat('en-GB', { dateStyle: 'long', timeStyle: 'short', timeZone: 'UTC' });
const until = (at: Date) => `${when.format(at)} UTC`;

const ROLE_WORDS: Record<Role, string> = {
  annotator: 'an annotator (uploads runs, builds and annotates trees)',
  reviewer: 'a reviewer (reads, remarks, approves or asks for changes)',
  lead: 'a lead (manages the group and its members)',
  guest: 'a guest (reads the studies that were opened to you)'
};

export interface InvitationMail {
  group: string;
  invitedBy: string;
  role: Role;
  link: string;
  expiresAt: Date;
}

/** Asks somebody to join a group. */
export const invitationMail = (m: InvitationMail): MailMessage =>
  renderMail({
    subject: `Invitation to the group ${m.group}`,
    before: [`${m.invitedBy} invites you to join the group "${m.group}" in Rivenmark as ${ROLE_WORDS[m.role]}.`],
    link: { href: m.link, label: 'Accept the invitation' },
    after: [
      `The link works once, until ${until(m.expiresAt)}. If you did not expect this, do nothing: without the link nothing happens.`
    ]
  });

/** Lets somebody choose a new password. */
export const resetMail = (m: { name: string; link: string; expiresAt: Date }): MailMessage =>
  renderMail({
    subject: 'Choose a new password',
    before: [`${m.name}, somebody asked for a new password for your account in Rivenmark.`],
    link: { href: m.link, label: 'Choose a new password' },
    after: [
      `The link works once, until ${until(m.expiresAt)}. If it was not you, do nothing: your password stays as it is.`
    ]
  });

/** Tells the owner that the password is another one now. */
export const passwordChangedMail = (m: { name: string; at: Date; link: string }): MailMessage =>
  renderMail({
    subject: 'Your password was changed',
    before: [
      `${m.name}, the password of your account in Rivenmark was changed on ${until(m.at)}. Other sessions ended.`
    ],
    link: { href: m.link, label: 'Ask for a new password' },
    after: ['If it was not you, choose a new password with the link above and tell your operator.']
  });

export interface ReviewRequestMail {
  reviewer: string;
  askedBy: string;
  /** what a person recognises the tree by, e.g. its name with precursor m/z */
  tree: string;
  study: string;
  revision: number;
  message: string;
  link: string;
}

/** Asks a named reviewer for a verdict on one revision. */
export const reviewRequestMail = (m: ReviewRequestMail): MailMessage =>
  renderMail({
    subject: `Review asked: ${m.tree}, revision ${m.revision}`,
    before: [
      `${m.reviewer}, ${m.askedBy} asks for your review of ${m.tree} (study "${m.study}"), revision ${m.revision}.`,
      ...(m.message.trim() ? [`"${m.message.trim()}"`] : [])
    ],
    link: { href: m.link, label: 'Open the review' }
  });

export interface VerdictMail {
  receiver: string;
  reviewer: string;
  tree: string;
  study: string;
  revision: number;
  verdict: 'approve' | 'ask-for-changes';
  reason: string;
  link: string;
}

/** Tells the annotator what a reviewer decided. */
export function verdictMail(m: VerdictMail): MailMessage {
  const approved = m.verdict === 'approve';
  return renderMail({
    subject: `${approved ? 'Approved' : 'Changes asked'}: ${m.tree}, revision ${m.revision}`,
    before: [
      `${m.receiver}, ${m.reviewer} ${approved ? 'approved' : 'asks for changes to'} revision ${m.revision} of ${m.tree} (study "${m.study}").`,
      ...(m.reason.trim() ? [`"${m.reason.trim()}"`] : [])
    ],
    link: { href: m.link, label: 'Open the review' }
  });
}
