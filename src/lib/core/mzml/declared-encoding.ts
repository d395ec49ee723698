import { CoreError } from '../errors';

/**
 * A decoder for the encoding that the XML declaration names; UTF-8 when there is none.
 * @throws CoreError xml when it is not known
 */
export function declaredDecoder(prolog: Uint8Array): TextDecoder {
  const text = new TextDecoder('iso-8859-1').decode(prolog.subarray(0, 400));
  const label = /<\?xml[^>]*\bencoding\s*=\s*["']([^"']{1,40})["']/.exec(text)?.[1] ?? 'utf-8';
  // UTF-16 was transcoded before it came here; the declaration still names it.
  const name = /^(utf-?16|ucs-?2|iso-10646)/i.test(label) ? 'utf-8' : label;
  try {
    return new TextDecoder(name);
  } catch {
    throw new CoreError('xml', `The text encoding "${label}" is not known`, { byte: 0, scan: null });
  }
}
