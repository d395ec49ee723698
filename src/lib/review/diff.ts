import type { FrozenIon, FrozenRemark, RevisionContent } from './content';

/** One line of "what changed". */
export interface IonChange {
  ionId: number;
  spectrum: number;
  mz: number;
  kind: 'formula' | 'state' | 'reason' | 'added' | 'removed';
  before: { state: FrozenIon['state']; formula: string | null } | null;
  after: { state: FrozenIon['state']; formula: string | null } | null;
}

export interface FactChange {
  /** in words, e.g. "formula of the molecule" */
  what: string;
  before: string;
  after: string;
}

export interface RevisionDiff {
  facts: FactChange[];
  ions: IonChange[];
  /** remarks opened since, and remarks that are no longer open. */
  remarksOpened: FrozenRemark[];
  remarksClosed: FrozenRemark[];
}

const claimOf = ({ state, formula }: FrozenIon) => ({ state, formula });

function ionChange(before: FrozenIon, after: FrozenIon): IonChange | null {
  const kind =
    before.formula !== after.formula
      ? 'formula'
      : before.state !== after.state
        ? 'state'
        : before.reason !== after.reason
          ? 'reason'
          : null;
  if (!kind) return null;
  const { id: ionId, spectrum, mz } = after;
  return { ionId, spectrum, mz, kind, before: claimOf(before), after: claimOf(after) };
}

function ionChanges(before: readonly FrozenIon[], after: readonly FrozenIon[]): IonChange[] {
  const old = new Map(before.map((ion) => [ion.id, ion]));
  const found: IonChange[] = [];
  for (const ion of after) {
    const was = old.get(ion.id);
    old.delete(ion.id);
    const change = was
      ? ionChange(was, ion)
      : {
          ...{ ionId: ion.id, spectrum: ion.spectrum, mz: ion.mz },
          ...{ kind: 'added' as const, before: null, after: claimOf(ion) }
        };
    if (change) found.push(change);
  }
  for (const ion of old.values())
    found.push({
      ...{ ionId: ion.id, spectrum: ion.spectrum, mz: ion.mz },
      ...{ kind: 'removed' as const, before: claimOf(ion), after: null }
    });
  return found.sort((a, b) => a.spectrum - b.spectrum || a.mz - b.mz);
}

const none = '–';
const windowText = (tolerance: RevisionContent['settings']['tolerance']) =>
  tolerance ? `${tolerance.ppm} ppm, at least ${tolerance.mda} mDa` : 'by analyser';

/** Facts and settings in words, in the order in which they are shown. */
function facts({ tree, settings, spectra, run }: RevisionContent): [what: string, value: string][] {
  return [
    ['name', tree.name],
    ['run', run.fileName],
    ['ion type', tree.adduct ?? none],
    ['formula of the molecule', tree.formula ?? none],
    ['formula fixed by a person', tree.formulaFixed ? 'yes' : 'no'],
    ['confidence level', tree.confidenceLevel ?? none],
    ['ion current explained', `${(tree.explained * 100).toFixed(1)} %`],
    ['elements', settings.elements ?? 'usual'],
    ['ion types considered', settings.adducts.join(', ') || 'usual'],
    ['mass window', windowText(settings.tolerance)],
    ['collision energies kept apart', settings.separateEnergies ? 'yes' : 'no'],
    ['number of spectra', String(spectra.length)]
  ];
}

/** What changed from one frozen revision to a later one: facts and settings, claims ion by ion, remarks. */
export function diffRevisions(before: RevisionContent, after: RevisionContent): RevisionDiff {
  const old = new Map(facts(before));
  const openBefore = new Set(before.remarks.map((r) => r.id));
  const openAfter = new Set(after.remarks.map((r) => r.id));
  return {
    facts: facts(after)
      .filter(([what, value]) => old.get(what) !== value)
      .map(([what, value]) => ({ what, before: old.get(what) ?? none, after: value })),
    ions: ionChanges(before.ions, after.ions),
    remarksOpened: after.remarks.filter((r) => !openBefore.has(r.id)),
    remarksClosed: before.remarks.filter((r) => !openAfter.has(r.id))
  };
}

/** Whether nothing changed at all. */
export const isSame = (diff: RevisionDiff): boolean =>
  !diff.facts.length && !diff.ions.length && !diff.remarksOpened.length && !diff.remarksClosed.length;
