/** A piece of a remark: plain text, a number that is an m/z, or a formula whose counts are lowered. */
export interface Token {
  kind: 'text' | 'mz' | 'formula';
  text: string;
}

// One or more element symbols with counts. Two symbols or a count are needed, so that "I", "In" or "He" stay words.
const SYMBOL =
  'C[aldrsuo]?|H[efg]?|N[aei]?|O|P[btd]?|S[bceinr]?|B[aeir]?|F[e]?|I|K|L[i]|M[gno]|Z[n]|A[glsu]|T[i]|V|W|R[bu]|D';
const FORMULA = new RegExp(`^(?:(?:${SYMBOL})\\d*)+$`);
const PIECE = /(\d+\.\d{2,5})|([A-Z][A-Za-z0-9]*)/g;
/** Texts of element symbols that people write as words or names. */
const WORDS = new Set(['MS', 'CID', 'HCD', 'ETD', 'ESI', 'OK', 'IS', 'IN', 'NO', 'NOT', 'SO', 'ON', 'OF', 'CV', 'PC']);

function isFormula(word: string): boolean {
  if (WORDS.has(word) || !FORMULA.test(word)) return false;
  return /\d/.test(word) || /^(CO|NO2?|HCN|CN|HF|HI|SO|HO|OH|CHO|NH|CH)$/.test(word);
}

/**
 * Cuts the text of a remark into tokens whose texts joined give the text again. An m/z is a number with two to five
 * decimals ("204.10"); a formula has element symbols with at least one count, or is a usual short one (CO, HCN).
 */
export function tokenise(text: string): Token[] {
  const tokens: Token[] = [];
  let from = 0;
  const push = (kind: Token['kind'], piece: string) => {
    const last = tokens.at(-1);
    if (!piece) return;
    if (last?.kind === 'text' && kind === 'text') last.text += piece;
    else tokens.push({ kind, text: piece });
  };
  for (const match of text.matchAll(PIECE)) {
    const at = match.index;
    const before = text[at - 1] ?? ' ';
    const after = text[at + match[0].length] ?? ' ';
    const bounded = !/[A-Za-z0-9./]/.test(before) && !/[A-Za-z0-9/]/.test(after);
    const kind = !bounded ? 'text' : match[1] ? 'mz' : isFormula(match[0]) ? 'formula' : 'text';
    push('text', text.slice(from, at));
    push(kind, match[0]);
    from = at + match[0].length;
  }
  push('text', text.slice(from));
  return tokens;
}

/** Paragraphs of a remark: blank lines part them; single line breaks stay. */
export const paragraphs = (body: string): string[] =>
  body
    .replace(/\r\n?/g, '\n')
    .split(/\n{2,}/)
    .map((p) => p.trim())
    .filter(Boolean);
