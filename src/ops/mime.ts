/** Reads the mails that our own mailer writes: enough of MIME for the local mail catcher, not a general reader. */

export interface ReadMail {
  from: string;
  to: string;
  subject: string;
  date: string;
  text: string;
  html: string;
}

type Headers = Map<string, string>;

function split(raw: string): { headers: Headers; body: string } {
  const end = raw.search(/\r?\n\r?\n/);
  const head = end < 0 ? raw : raw.slice(0, end);
  const headers: Headers = new Map();
  for (const line of head.replace(/\r?\n[ \t]+/g, ' ').split(/\r?\n/)) {
    const colon = line.indexOf(':');
    if (colon > 0) headers.set(line.slice(0, colon).trim().toLowerCase(), line.slice(colon + 1).trim());
  }
  return { headers, body: end < 0 ? '' : raw.slice(end).replace(/^\r?\n\r?\n/, '') };
}

function quotedPrintable(text: string): Buffer {
  const joined = text.replace(/[ \t]+(?=\r?\n)/g, '').replace(/=\r?\n/g, '');
  return Buffer.from(
    joined.replace(/=([0-9A-Fa-f]{2})/g, (_, hex: string) => String.fromCharCode(parseInt(hex, 16))),
    'latin1'
  );
}

const decode = (bytes: Buffer, charset: string) => new TextDecoder(charset || 'utf-8').decode(bytes);

/** Encoded words of RFC 2047; white space between two of them is no part of the text. */
function readHeader(value: string): string {
  return value
    .replace(/\?=\s+=\?/g, '?==?')
    .replace(/=\?([^?]+)\?([BbQq])\?([^?]*)\?=/g, (_, charset: string, kind: string, text: string) =>
      decode(
        kind.toUpperCase() === 'B' ? Buffer.from(text, 'base64') : quotedPrintable(text.replaceAll('_', ' ')),
        charset
      )
    );
}

function parameter(value: string, name: string): string {
  const found = new RegExp(`;\\s*${name}=(?:"([^"]*)"|([^;\\s]*))`, 'i').exec(value);
  return found?.[1] ?? found?.[2] ?? '';
}

function readBody(headers: Headers, body: string): string {
  const charset = parameter(headers.get('content-type') ?? '', 'charset');
  const coding = (headers.get('content-transfer-encoding') ?? '7bit').toLowerCase();
  if (coding === 'base64') return decode(Buffer.from(body, 'base64'), charset);
  if (coding === 'quoted-printable') return decode(quotedPrintable(body), charset);
  return decode(Buffer.from(body, 'latin1'), charset);
}

function collect(raw: string, into: { text: string; html: string }): void {
  const { headers, body } = split(raw);
  const type = headers.get('content-type') ?? 'text/plain';
  const boundary = parameter(type, 'boundary');
  if (/^multipart\//i.test(type) && boundary) {
    const parts = `\n${body}`.split(`\n--${boundary}`).slice(1);
    for (const part of parts) if (!part.startsWith('--')) collect(part.replace(/^\r?\n/, '').replace(/\r$/, ''), into);
  } else if (/^text\/html/i.test(type)) into.html += readBody(headers, body);
  else if (/^text\//i.test(type)) into.text += readBody(headers, body);
}

/** @param raw the mail as it came over SMTP */
export function readMail(raw: Buffer): ReadMail {
  const source = raw.toString('latin1');
  const { headers } = split(source);
  const header = (name: string) => readHeader(headers.get(name) ?? '');
  const parts = { text: '', html: '' };
  collect(source, parts);
  return { from: header('from'), to: header('to'), subject: header('subject'), date: header('date'), ...parts };
}
