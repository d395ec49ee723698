import { CoreError } from '../errors';
import { cutsOf } from './cuts';
import { atomSet, type AtomSet, type MoleculeGraph } from './graph';

/** A connected part of the molecule and the cheapest way to get it. */
export interface Part {
  atoms: AtomSet;
  /** sum of the penalties of the broken bonds. */
  cost: number;
  brokenBonds: number;
  /** hydrogens on the kept atoms as drawn. */
  hydrogens: number;
  /** heavy-atom composition, e.g. "C7O2": key for comparing with an ion formula. */
  key: string;
}

export interface DisconnectOptions {
  /** rounds of disconnection; each breaks one bond, or two of one ring. Default 3. */
  depth?: number;
  /** parts are no longer split once so many were found. Default 20,000. */
  maxParts?: number;
  /** smallest part, heavy atoms. Default 2. */
  minAtoms?: number;
  isCancelled?: () => boolean;
}

export interface Disconnection {
  parts: Map<AtomSet, Part>;
  /** false when `maxParts` stopped it: parts that need more broken bonds may be missing. */
  complete: boolean;
  depth: number;
}

/**
 * Penalty of breaking a bond: 1 for a single C–C bond, less for bonds to hetero atoms, more for multiple and aromatic ones.
 * The order of the values follows bond energies; the idea of penalised disconnection is published
 * (Rapid Commun. Mass Spectrom. 19, 3111, 2005; BMC Bioinformatics 11, 148, 2010), the numbers are ours.
 */
export function bondPenalty(graph: MoleculeGraph, bond: number): number {
  const { a, b, order, aromatic } = graph.bonds[bond];
  const carbon = graph.atoms[a].element === 'C' && graph.atoms[b].element === 'C';
  if (aromatic) return 2.5;
  return (carbon ? 1 : 0.7) * (order === 1 ? 1 : order);
}

/** Heavy-atom composition as sorted text. */
export function heavyKey(counts: Readonly<Record<string, number>>): string {
  return Object.keys(counts)
    .filter((element) => element !== 'H' && counts[element] > 0)
    .sort()
    .map((element) => element + counts[element])
    .join('');
}

function describe(graph: MoleculeGraph, atoms: AtomSet): { hydrogens: number; key: string; size: number } {
  const counts: Record<string, number> = {};
  let hydrogens = 0;
  let size = 0;
  graph.atoms.forEach((atom, i) => {
    if (!((atoms >> BigInt(i)) & 1n)) return;
    counts[atom.element] = (counts[atom.element] ?? 0) + 1;
    hydrogens += atom.hydrogens;
    size++;
  });
  return { hydrogens, key: heavyKey(counts), size };
}

/**
 * Systematic bond disconnection: every connected part that `depth` rounds can give, each with its least cost.
 * Deterministic; parts are visited by rising cost within a round.
 * @throws CoreError cancelled
 */
export function disconnect(graph: MoleculeGraph, options: DisconnectOptions = {}): Disconnection {
  const { depth = 3, maxParts = 20_000, minAtoms = 2, isCancelled } = options;
  const whole = atomSet(graph.atoms.keys());
  const parts = new Map<AtomSet, Part>();
  parts.set(whole, { atoms: whole, cost: 0, brokenBonds: 0, ...describe(graph, whole) });
  let round: Part[] = [parts.get(whole)!];
  let complete = true;
  for (let level = 0; level < depth && round.length; level++) {
    const next = new Map<AtomSet, Part>();
    for (const part of round.sort((x, y) => x.cost - y.cost || (x.atoms < y.atoms ? -1 : 1))) {
      if (isCancelled?.()) throw new CoreError('cancelled', 'The disconnection was cancelled.');
      if (parts.size >= maxParts) {
        complete = false;
        break;
      }
      split(graph, part, minAtoms, parts, next);
    }
    round = [...next.values()];
  }
  return { parts, complete, depth };
}

/** Adds both sides of every cut of a part, keeping the cheapest way to each. */
function split(
  graph: MoleculeGraph,
  part: Part,
  minAtoms: number,
  parts: Map<AtomSet, Part>,
  next: Map<AtomSet, Part>
) {
  for (const cut of cutsOf(graph, part.atoms)) {
    const cost = part.cost + cut.bonds.reduce((sum, bond) => sum + bondPenalty(graph, bond), 0);
    for (const atoms of [cut.side, part.atoms & ~cut.side]) {
      const known = parts.get(atoms);
      if (known && known.cost <= cost) continue;
      const facts = describe(graph, atoms);
      if (facts.size < minAtoms) continue;
      const found: Part = {
        atoms,
        cost,
        brokenBonds: part.brokenBonds + cut.bonds.length,
        hydrogens: facts.hydrogens,
        key: facts.key
      };
      parts.set(atoms, found);
      next.set(atoms, found);
    }
  }
}
