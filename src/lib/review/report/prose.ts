import type { Report } from './model';

/** A piece of running text that is set in its own way. */
export interface ProsePart {
  kind: 'text' | 'stage' | 'mz' | 'formula' | 'ion-type' | 'hash';
  text: string;
}

const escapeRegExp = (text: string): string => text.replace(/[.*+?^${}()|[\]\\]/g, '\\$&');

/**
 * Cuts a paragraph of a report into parts: stages (MS2), m/z, hashes, and the tree's own formula and ion type. Only
 * these known texts are marked, so that a file name that looks like a formula stays a file name.
 */
export function proseParts(text: string, tree: Pick<Report['tree'], 'formula' | 'adduct'>): ProsePart[] {
  const own = [tree.adduct, tree.formula && `${tree.formula} (`].filter((t) => t !== null).map(escapeRegExp);
  const pattern = new RegExp(['\\bMS\\d+\\b', 'm/z', '\\b[0-9a-f]{64}\\b', ...own].join('|'), 'g');
  const parts: ProsePart[] = [];
  let from = 0;
  const push = (kind: ProsePart['kind'], piece: string) => piece && parts.push({ kind, text: piece });
  for (const { 0: found, index } of text.matchAll(pattern)) {
    push('text', text.slice(from, index));
    from = index + found.length;
    if (found === 'm/z') push('mz', found);
    else if (/^MS\d+$/.test(found)) push('stage', found);
    else if (found === tree.adduct) push('ion-type', found);
    else if (found.endsWith(' (')) {
      push('formula', found.slice(0, -2));
      from -= 2;
    } else push('hash', found);
  }
  push('text', text.slice(from));
  return parts;
}
