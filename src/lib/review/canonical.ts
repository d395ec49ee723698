/**
 * Canonical JSON after RFC 8785 (JSON Canonicalization Scheme): members sorted by UTF-16 code units, no white space,
 * numbers in the shortest form that reads back to the same double. Equal content gives equal bytes, so that a hash of
 * the UTF-8 text names the content.
 * @throws TypeError for what JSON cannot hold (undefined inside arrays, functions, NaN, infinities, lone surrogates)
 */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value === 'boolean') return String(value);
  if (typeof value === 'number') return numberText(value);
  if (typeof value === 'string') return stringText(value);
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`;
  if (typeof value === 'object') return objectText(value);
  throw new TypeError(`canonical JSON cannot hold a ${typeof value}`);
}

function numberText(value: number): string {
  if (!Number.isFinite(value)) throw new TypeError(`canonical JSON cannot hold the number ${value}`);
  return value === 0 ? '0' : JSON.stringify(value);
}

function stringText(value: string): string {
  if (!value.isWellFormed()) throw new TypeError('canonical JSON cannot hold a lone surrogate');
  return JSON.stringify(value);
}

function objectText(value: object): string {
  const members = Object.entries(value)
    .filter(([, member]) => member !== undefined)
    .sort(([a], [b]) => (a < b ? -1 : 1))
    .map(([key, member]) => `${stringText(key)}:${canonicalJson(member)}`);
  return `{${members.join(',')}}`;
}

/** Rounds to decimal places, so that digits beyond any measurement do not enter a hash; null stays null. */
export function fixed(value: number, decimals: number): number;
export function fixed(value: number | null, decimals: number): number | null;
export function fixed(value: number | null, decimals: number): number | null {
  return value === null ? null : Number(value.toFixed(decimals));
}

/** Rounds to significant digits (intensities span many orders of magnitude). */
export const significant = (value: number, digits: number): number => Number(value.toPrecision(digits));
