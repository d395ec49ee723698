/** Small helpers for drawing figures as SVG text: escaping, numbers, formulas with lowered counts and raised charge. */

/** Colours of the printed figure: the light palette of the product, on white paper. */
export const INK = {
  ink: '#1e2a2f',
  ink2: '#566165',
  ink3: '#767f7c',
  rule: '#d3cab8',
  moss: '#3d6b3b',
  ochre: '#95600d',
  brick: '#a23b2c'
} as const;

export const MONO = "'IBM Plex Mono', monospace";
export const SANS = "'IBM Plex Sans', sans-serif";
/** Advance width of every character of the monospaced face, in em. */
const ADVANCE = 0.6;
/** Size of lowered and raised characters, in em. */
const SMALL = 0.72;

const ESCAPES: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' };
/** Characters that XML 1.0 forbids even when escaped. */
const FORBIDDEN = /[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\u{10000}-\u{10ffff}]/gu;

/** Text safe inside XML elements and attributes. */
export const escapeXml = (text: string): string => text.replace(FORBIDDEN, '').replace(/[&<>"']/g, (c) => ESCAPES[c]);

/** Coordinate with two decimals at most. */
export const n = (value: number): string => String(Math.round(value * 100) / 100);

/** Width in px of monospaced text. */
export const monoWidth = (text: string, size: number): number => text.length * size * ADVANCE;

interface TextStyle {
  size: number;
  fill?: string;
  anchor?: 'start' | 'middle' | 'end';
  mono?: boolean;
  medium?: boolean;
}

const attributes = ({ size, fill = INK.ink, anchor = 'start', mono = false, medium = false }: TextStyle): string =>
  `font-family="${mono ? MONO : SANS}" font-size="${n(size)}" fill="${fill}"` +
  (anchor === 'start' ? '' : ` text-anchor="${anchor}"`) +
  (medium ? ' font-weight="500"' : '');

/** A line of plain text with its baseline at (x, y). */
export const textAt = (x: number, y: number, text: string, style: TextStyle): string =>
  `<text x="${n(x)}" y="${n(y)}" ${attributes(style)}>${escapeXml(text)}</text>`;

/** Width in px of a formula as {@link formulaAt} draws it. */
export function formulaWidth(formula: string, size: number, charge = '', prefix = ''): number {
  const digits = formula.replace(/\D/g, '').length;
  const large = formula.length - digits + prefix.length;
  return (large + (digits + charge.length) * SMALL) * size * ADVANCE;
}

/**
 * A formula starting at x with its baseline at y; counts lowered, charge raised. Drawn piece by piece with own x, because
 * fonts lack superscript signs and PDF writers disagree about baseline shifts.
 */
export function formulaAt(
  x: number,
  y: number,
  formula: string,
  { size, fill = INK.ink, charge = '', prefix = '' }: { size: number; fill?: string; charge?: string; prefix?: string }
): string {
  let at = x;
  const piece = (text: string, shift: number): string => {
    const own = shift === 0 ? size : size * SMALL;
    const drawn = textAt(at, y + shift, text, { size: own, fill, mono: true });
    at += monoWidth(text, own);
    return drawn;
  };
  const parts = [prefix && piece(prefix, 0)];
  for (const part of formula.split(/(\d+)/)) if (part) parts.push(piece(part, /^\d/.test(part) ? size * 0.2 : 0));
  if (charge) parts.push(piece(charge, -size * 0.34));
  return parts.join('');
}

/** Head of a stick by claim state; shape doubles colour. */
export function head(state: 'open' | 'proposed' | 'confirmed' | 'rejected', x: number, y: number): string {
  if (state === 'confirmed') return `<circle cx="${n(x)}" cy="${n(y)}" r="3.6" fill="${INK.moss}"/>`;
  if (state === 'proposed')
    return `<circle cx="${n(x)}" cy="${n(y)}" r="3.2" fill="#ffffff" stroke="${INK.ochre}" stroke-width="1.6"/>`;
  if (state === 'rejected')
    return `<path d="M${n(x - 3)} ${n(y - 3)}l6 6m0-6l-6 6" stroke="${INK.ink3}" stroke-width="1.4" fill="none"/>`;
  return '';
}

/** Colour of a stick by claim state. */
export const stateColour = { open: INK.ink3, proposed: INK.ochre, confirmed: INK.moss, rejected: INK.ink3 } as const;

export const line = (
  x1: number,
  y1: number,
  x2: number,
  y2: number,
  stroke: string,
  width: number,
  dash = ''
): string =>
  `<path d="M${n(x1)} ${n(y1)}L${n(x2)} ${n(y2)}" stroke="${stroke}" stroke-width="${width}" fill="none"${dash && ` stroke-dasharray="${dash}"`}/>`;

/** The whole drawing, white ground, with title and description for readers who do not see it. */
export const svgDocument = (width: number, height: number, title: string, description: string, body: string): string =>
  `<svg xmlns="http://www.w3.org/2000/svg" width="${n(width)}" height="${n(height)}" viewBox="0 0 ${n(width)} ${n(height)}" role="img">` +
  `<title>${escapeXml(title)}</title><desc>${escapeXml(description)}</desc>` +
  `<rect width="${n(width)}" height="${n(height)}" fill="#ffffff"/>${body}</svg>`;
