import { formatFormula } from '../chem';
import { ELECTRON_MASS, valenceOf } from '../chem/elements';
import { CoreError } from '../errors';
import { type Composition } from '../model';
import { type FormulaSpace } from '../formula/solve';

/** An ion (or loss) composition in the compact form that the tree search compares. */
export interface IonFormula {
  /** mixed-radix number of the counts: differences of keys are keys of losses. */
  key: number;
  counts: Uint16Array;
  /** counts packed with one guard bit each, for the subset test. */
  w0: number;
  w1: number;
  w2: number;
  /** mass of all nuclei with their electrons, u. */
  mass: number;
  dbe: number;
}

interface Field {
  word: number;
  shift: number;
}

const WORD_BITS = 31;
const WORDS = 3;

/**
 * All compositions up to the maxima of a formula space, numbered so that sub-formula tests and losses are integer
 * arithmetic. Elements follow the order of the space.
 */
export class IonSpace {
  readonly symbols: readonly string[];
  readonly radix: Float64Array;
  readonly guards: readonly [number, number, number];
  /** key and mass (u) of H2O; the key is NaN when the space has no oxygen. */
  readonly waterKey: number;
  readonly waterMass: number;
  private readonly fields: Field[] = [];
  private readonly valence: Float64Array;
  private readonly interned = new Map<number, IonFormula>();
  private readonly texts = new Map<number, string>();

  /** @throws CoreError bad-elements when the ranges allow more combinations than can be numbered. */
  constructor(readonly space: FormulaSpace) {
    this.symbols = space.symbols;
    this.radix = new Float64Array(space.symbols.length);
    this.valence = Float64Array.from(space.symbols, valenceOf);
    let place = 1;
    let word = 0;
    let used = 0;
    const guards: [number, number, number] = [0, 0, 0];
    space.symbols.forEach((_, i) => {
      this.radix[i] = place;
      place *= space.max[i] + 1;
      const bits = Math.ceil(Math.log2(space.max[i] + 1)) + 1;
      if (used + bits > WORD_BITS) {
        word++;
        used = 0;
      }
      if (word >= WORDS || place > Number.MAX_SAFE_INTEGER) throw tooWide();
      this.fields.push({ word, shift: used });
      guards[word] |= 1 << (used + bits - 1);
      used += bits;
    });
    this.guards = guards;
    const oxygen = space.symbols.indexOf('O');
    this.waterKey = 2 * this.radix[1] + (this.radix[oxygen] ?? NaN);
    this.waterMass = 2 * space.masses[1] + (space.masses[oxygen] ?? NaN);
  }

  /** Key of a composition; null when it holds another element or more atoms than the space. */
  keyOf(composition: Composition): number | null {
    let key = 0;
    for (const symbol of Object.keys(composition)) {
      const i = this.symbols.indexOf(symbol);
      const count = composition[symbol];
      if (i < 0 ? count !== 0 : count < 0 || count > this.space.max[i]) return null;
      if (i >= 0) key += count * this.radix[i];
    }
    return key;
  }

  key(counts: ArrayLike<number>): number {
    let key = 0;
    for (let i = 0; i < this.radix.length; i++) key += counts[i] * this.radix[i];
    return key;
  }

  /** The one shared object of a key. */
  formula(key: number): IonFormula {
    let found = this.interned.get(key);
    if (!found) this.interned.set(key, (found = this.decode(key)));
    return found;
  }

  /** Packs counts into guard-bit words. */
  pack(counts: ArrayLike<number>): [number, number, number] {
    const words: [number, number, number] = [0, 0, 0];
    this.fields.forEach(({ word, shift }, i) => (words[word] |= counts[i] << shift));
    return words;
  }

  /** True when every count of `part` is at most that of `whole`. */
  contains(whole: IonFormula, part: IonFormula): boolean {
    const [g0, g1, g2] = this.guards;
    return (
      (((whole.w0 | g0) - part.w0) & g0) === g0 &&
      (((whole.w1 | g1) - part.w1) & g1) === g1 &&
      (((whole.w2 | g2) - part.w2) & g2) === g2
    );
  }

  composition(key: number): Composition {
    const { counts } = this.formula(key);
    const result: Record<string, number> = {};
    this.symbols.forEach((symbol, i) => {
      if (counts[i] > 0) result[symbol] = counts[i];
    });
    return result;
  }

  /** Hill-order text of a key. */
  text(key: number): string {
    let text = this.texts.get(key);
    if (text === undefined) this.texts.set(key, (text = formatFormula(this.composition(key))));
    return text;
  }

  /** m/z of an ion of signed charge. */
  mz(ion: IonFormula, charge: number): number {
    return (ion.mass - charge * ELECTRON_MASS) / Math.abs(charge);
  }

  /** Rings plus double bonds of counts. */
  dbe(counts: ArrayLike<number>): number {
    let sum = 1;
    for (let i = 0; i < this.valence.length; i++) sum += (counts[i] * (this.valence[i] - 2)) / 2;
    return sum;
  }

  private decode(key: number): IonFormula {
    const counts = new Uint16Array(this.radix.length);
    let rest = key;
    let mass = 0;
    for (let i = this.radix.length - 1; i >= 0; i--) {
      counts[i] = Math.floor(rest / this.radix[i]);
      rest -= counts[i] * this.radix[i];
      mass += counts[i] * this.space.masses[i];
    }
    const [w0, w1, w2] = this.pack(counts);
    return { key, counts, w0, w1, w2, mass, dbe: this.dbe(counts) };
  }
}

const tooWide = () =>
  new CoreError(
    'bad-elements',
    'The element ranges allow more combinations than can be searched.',
    undefined,
    'Allow fewer elements or smaller maxima.'
  );
