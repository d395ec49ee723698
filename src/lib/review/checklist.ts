import { basePeaks, relativeIntensity, type FrozenIon, type FrozenSpectrum, type RevisionContent } from './content';

/** Something a reviewer should look at, or may pass over because it is in order. */
export interface Check {
  key: string;
  /** 'look': needs an answer; 'note': worth knowing; 'ok': in order. */
  level: 'look' | 'note' | 'ok';
  title: string;
  detail: string;
  /** at most {@link MAX_NAMED} ions, strongest first; `count` is the full number. */
  ions: { id: number; spectrum: number; mz: number; relative: number }[];
  count: number;
}

/** Percent of the base peak from which an ion without a formula needs an answer. */
export const INTENSE = 5;
/** Percent from which an open ion needs a reason. */
export const RELEVANT = 1;
/** Share of the product ion current below which a tree counts as poorly explained. */
export const LOW_EXPLAINED = 0.7;
/** A rival within this score (natural-log units: evidence less than ten to one) makes a formula ambiguous. */
export const AMBIGUOUS = Math.log(10);
/** Half windows from here on, in mDa, are unit resolution. */
const UNIT_RESOLUTION = 50;
export const MAX_NAMED = 12;

interface Ranked extends FrozenIon {
  relative: number;
}
interface Facts {
  content: RevisionContent;
  /** product ions that are no satellites, strongest first. */
  ions: Ranked[];
  spectra: Map<number, FrozenSpectrum>;
}

const claimed = (ion: FrozenIon) => ion.formula !== null && (ion.state === 'confirmed' || ion.state === 'proposed');

/** True when the claim's error is outside the search window of its spectrum: max(ppm, mDa), as in the search. */
function outside(ion: FrozenIon, spectra: Map<number, FrozenSpectrum>): boolean {
  const tolerance = spectra.get(ion.spectrum)?.tolerance;
  if (!tolerance || ion.errorPpm === null || !claimed(ion)) return false;
  const window = Math.max(tolerance.ppm * ion.mz * 1e-6, tolerance.mda * 1e-3);
  return Math.abs(ion.errorPpm) * ion.mz * 1e-6 > window;
}

function about(
  key: string,
  found: Ranked[],
  level: 'look' | 'note',
  title: string,
  fine: string,
  detail: string
): Check {
  const ions = found.slice(0, MAX_NAMED).map(({ id, spectrum, mz, relative }) => ({ id, spectrum, mz, relative }));
  const none = found.length === 0;
  return {
    key,
    level: none ? 'ok' : level,
    title: none ? fine : title,
    detail: none ? '' : detail,
    ions,
    count: found.length
  };
}

function ionChecks({ ions, spectra }: Facts): Check[] {
  const unanswered = ions.filter((ion) => !claimed(ion) && !ion.reason);
  return [
    about(
      'unexplained',
      unanswered.filter((ion) => ion.relative >= INTENSE),
      'look',
      'Intense ions without a formula',
      'Every intense ion has a formula or a reason',
      `At least ${INTENSE} % of the base peak of their spectrum, and nobody said why they stay unexplained.`
    ),
    about(
      'open-without-reason',
      unanswered.filter((ion) => ion.state === 'open' && ion.relative >= RELEVANT && ion.relative < INTENSE),
      'note',
      'Weaker ions left open without a reason',
      'No weaker ion is left open without a reason',
      `From ${RELEVANT} to ${INTENSE} % of the base peak of their spectrum.`
    ),
    about(
      'beyond-tolerance',
      ions.filter((ion) => outside(ion, spectra)),
      'look',
      'Claims beyond the mass window',
      'All claims lie within the mass window',
      'Their formula was given by a person or kept from a wider search.'
    ),
    about(
      'ambiguous',
      ions.filter((ion) => claimed(ion) && ion.rival && ion.score !== null && ion.score - ion.rival.score < AMBIGUOUS),
      'note',
      'Ambiguous formulas',
      'No formula has a close rival',
      'Another formula within the window is less than ten times less likely.'
    ),
    about(
      'unconfirmed',
      ions.filter((ion) => ion.state === 'proposed' && ion.formula !== null && ion.relative >= RELEVANT),
      'note',
      'Proposals that nobody confirmed',
      'Every relevant proposal was confirmed or rejected',
      `Ions from ${RELEVANT} % of the base peak on.`
    )
  ];
}

const plain = (
  key: string,
  bad: boolean,
  level: 'look' | 'note',
  title: string,
  fine: string,
  detail: string
): Check => ({
  ...{
    key,
    level: bad ? level : 'ok',
    title: bad ? title : fine,
    detail: bad ? detail : '',
    ions: [],
    count: Number(bad)
  }
});

function treeChecks({ content }: Facts): Check[] {
  const { tree, remarks, spectra } = content;
  const unit = spectra.filter((s) => s.tolerance.mda >= UNIT_RESOLUTION);
  const guessed = spectra.filter((s) => s.level > 2 && (s.linkedBy === 'isolated-mz' || s.linkedBy === 'none'));
  const share = `${(tree.explained * 100).toFixed(1)} %`;
  return [
    plain(
      ...(['formula', !tree.formula, 'look', 'The molecule has no formula yet', 'The molecule has a formula'] as const),
      'Run a suggestion, or fix the formula in the workbench.'
    ),
    plain(
      ...(['remarks', remarks.length > 0, 'look', `Open remarks: ${remarks.length}`, 'No open remarks'] as const),
      'Answer and resolve them, or approve with them on record.'
    ),
    plain(
      ...(['explained', tree.explained < LOW_EXPLAINED, 'look'] as const),
      ...([
        `Only ${share} of the product ion current is explained`,
        `${share} of the product ion current is explained`
      ] as const),
      `Below ${LOW_EXPLAINED * 100} % a tree supports little.`
    ),
    plain(
      ...(['unit-resolution', unit.length > 0, 'look', 'Unit resolution', 'Accurate mass throughout'] as const),
      `${unit.length} of ${spectra.length} spectra do not resolve formulas by mass: their formulas rest on relations alone.`
    ),
    plain(
      ...([
        'links',
        guessed.length > 0,
        'note',
        'Stages joined by m/z alone',
        'All stages joined by scan records'
      ] as const),
      `${guessed.length} of ${spectra.length} spectra were joined to the stage above because the m/z fits; the file names no scan.`
    ),
    plain(
      ...(['level', !tree.confidenceLevel, 'note', 'No confidence level stated', 'Confidence level stated'] as const),
      'The report then states none.'
    )
  ];
}

/** The reviewer's check list, computed from a frozen tree: what needs a look first, what is in order last. */
export function checkList(content: RevisionContent): Check[] {
  const peaks = basePeaks(content.ions);
  const ions = content.ions
    .filter((ion) => !ion.isPrecursor && !ion.flag)
    .map((ion) => ({ ...ion, relative: relativeIntensity(ion, peaks) }))
    .sort((a, b) => b.relative - a.relative || a.mz - b.mz);
  const facts: Facts = { content, ions, spectra: new Map(content.spectra.map((s) => [s.index, s])) };
  const order = { look: 0, note: 1, ok: 2 };
  return [...treeChecks(facts), ...ionChecks(facts)].sort((a, b) => order[a.level] - order[b.level]);
}
