/** A mail ready to go, without its receiver. */
export interface MailMessage {
  subject: string;
  text: string;
  html: string;
}

/** What a template says: paragraphs, and at most one link to follow. */
export interface MailParts {
  subject: string;
  before: string[];
  link?: { href: string; label: string };
  after?: string[];
}

const ESCAPES: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' };
const escape = (text: string) => text.replace(/[&<>"']/g, (c) => ESCAPES[c]);
/** A name with a line break in it could otherwise add header lines to the mail. */
const oneLine = (text: string) => text.replace(/[\p{Cc}\p{Zl}\p{Zp}]+/gu, ' ').trim();

const FOOT = 'Rivenmark · from an open mzML file to an agreed, citable fragmentation tree';

/** Renders plain text and HTML from the same parts; everything is escaped in the HTML. */
export function renderMail({ subject, before, link, after = [] }: MailParts): MailMessage {
  const lines = [...before, ...(link ? [link.href] : []), ...after, `-- \n${FOOT}`];
  const paragraph = (text: string) => `<p style="margin:0 0 14px">${escape(text).replaceAll('\n', '<br>')}</p>`;
  const button = link
    ? `<p style="margin:0 0 14px"><a href="${escape(link.href)}" style="color:#1e2a2f;font-weight:600">${escape(link.label)}</a></p>`
    : '';
  const html =
    '<!doctype html><html lang="en"><body style="background:#fdfbf5;color:#1e2a2f;font:15px/1.5 sans-serif;padding:24px">' +
    before.map(paragraph).join('') +
    button +
    after.map(paragraph).join('') +
    `<p style="margin:24px 0 0;color:#566165;font-size:12px">${escape(FOOT)}</p></body></html>`;
  return { subject: oneLine(subject).slice(0, 200), text: lines.join('\n\n') + '\n', html };
}
