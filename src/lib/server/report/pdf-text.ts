import type { Content, ContentText } from 'pdfmake/interfaces';
import { chargeText, type Cell } from '$lib/review/report/columns';
import type { Report } from '$lib/review/report/model';
import { proseParts } from '$lib/review/report/prose';

export const MONO = 'IBM Plex Mono';
export const SANS = 'IBM Plex Sans';

/** The typesetter shrinks raised text to 0.58 of its size; nine points come out legible. */
const RAISED = 9;
const raised = (text: string): Content => ({ text, font: MONO, sup: true, fontSize: RAISED });
const stageNumber = (text: string): Content => ({ text, sup: true, fontSize: RAISED });

const LOWERED = '₀₁₂₃₄₅₆₇₈₉';
const lowered = (digits: string): string => [...digits].map((d) => LOWERED[Number(d)]).join('');

/** Formula with lowered counts (the face has those digits) and a raised charge (it lacks raised signs). */
export function formulaRuns(formula: string, charge = ''): Content[] {
  const text = formula.replace(/\d+/g, lowered);
  const runs: Content[] = [{ text, font: MONO }];
  return charge ? [...runs, raised(charge)] : runs;
}

/** Ion type such as [M+H]+ with its charge raised. */
export function ionTypeRuns(adduct: string): Content[] {
  const match = /^(.*\])(.*)$/.exec(adduct);
  const [body, charge] = match ? [match[1], match[2]] : [adduct, ''];
  const runs: Content[] = [{ text: body.replaceAll('-', '−'), font: MONO }];
  return charge ? [...runs, raised(charge.replaceAll('-', '−'))] : runs;
}

/** Text with every "m/z" in italics, as the recommendations want it. */
export const mzRuns = (text: string): Content[] =>
  text
    .split(/(m\/z)/)
    .filter(Boolean)
    .map((part) => (part === 'm/z' ? { text: part, italics: true } : { text: part }));

/** A paragraph with stages raised, m/z in italics, formula and ion type set as such. */
export const proseRuns = (text: string, tree: Report['tree']): Content[] =>
  proseParts(text, tree).flatMap((part): Content[] => {
    if (part.kind === 'stage') return [{ text: 'MS' }, stageNumber(part.text.slice(2))];
    if (part.kind === 'formula') return formulaRuns(part.text);
    if (part.kind === 'ion-type') return ionTypeRuns(part.text);
    if (part.kind === 'hash') return [{ text: part.text, font: MONO, fontSize: 7.5 }];
    return [part.kind === 'mz' ? { text: part.text, italics: true } : { text: part.text }];
  });

export function cellContent(cell: Cell, right: boolean): ContentText {
  const alignment = right ? 'right' : 'left';
  if (cell.kind === 'formula') return { text: formulaRuns(cell.text, cell.charge), alignment, noWrap: true };
  if (cell.kind === 'number') return { text: cell.text, font: MONO, alignment };
  const stage = /^MS(\d+)$/.exec(cell.text);
  if (stage) return { text: [{ text: 'MS' }, stageNumber(stage[1])], alignment };
  return { text: cell.text, alignment };
}

/** Formula of the precursor ion with its charge. */
export const ionRuns = (formula: string | null, charge: number): Content[] =>
  formula === null ? [{ text: '–' }] : formulaRuns(formula, chargeText(charge));
