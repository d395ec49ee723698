/**
 * Takes the record of a spectrum straight from its XML where that has the common form: known elements and attributes
 * in the order of the schema, double quotes, no comments. Anything else is left to the XML parser, whose answer this
 * one must equal; a form is taken here only when it cannot be read in two ways.
 */
import { CoreError } from '../errors';
import type { ArrayText, ParamSet, PrecursorText, SpectrumRecord } from './record';
import { TagReader } from './tag-reader';

const emptySet = (): ParamSet => ({ refs: [], own: [] });

class QuickScanner {
  private readonly tags: TagReader;

  constructor(text: string) {
    this.tags = new TagReader(text);
  }

  /** The record, or null when the form is not common or the text does not hold exactly `count` tags. */
  spectrum(count: number): SpectrumRecord | null {
    const { tags } = this;
    if (tags.next() !== 'start' || tags.name !== 'spectrum' || !tags.readAttributes() || tags.empty) return null;
    const record: SpectrumRecord = {
      id: tags.attribute('id'),
      defaultArrayLength: tags.attribute('defaultArrayLength'),
      params: emptySet(),
      scan: null,
      precursors: [],
      arrays: []
    };
    const read = this.content('spectrum', record.params, (name) => this.spectrumChild(name, record));
    return read && tags.atEnd() && tags.count === count ? record : null;
  }

  /**
   * Reads what an element holds, its end tag included. Each child element but those in `many` may come once.
   * @param child reads the child whose start tag was just met with its attributes
   */
  private content(name: string, set: ParamSet | null, child: (name: string) => boolean, many = ''): boolean {
    const { tags } = this;
    let met = '';
    for (;;) {
      const kind = tags.next();
      if (kind !== 'start') return kind === 'end' && tags.name === name;
      const inner = tags.name;
      if (inner === 'cvParam') {
        if (!this.param(set, true)) return false;
      } else if (inner === 'userParam') {
        if (!this.param(set, false)) return false;
      } else {
        if (!tags.readAttributes()) return false;
        if (inner === 'referenceableParamGroupRef') {
          if (!tags.empty) return false;
          set?.refs.push(tags.attribute('ref') ?? '');
        } else {
          if (inner !== many && met.includes(`<${inner}>`)) return false;
          met += inner === many ? '' : `<${inner}>`;
          if (!child(inner)) return false;
        }
      }
    }
  }

  /** A record has its cvParams first; where the file has not, this is no common form. */
  private param(set: ParamSet | null, controlled: boolean): boolean {
    const param = this.tags.param(controlled);
    if (param === null) return false;
    if (set === null) return true;
    if (controlled && set.own.length > 0 && set.own[set.own.length - 1].accession === null) return false;
    if (controlled && param.accession === null) return false;
    set.own.push(param);
    return true;
  }

  /** An element that holds nothing but parameters. */
  private leaf(name: string, set: ParamSet | null): boolean {
    return this.tags.empty || this.content(name, set, () => false);
  }

  private spectrumChild(name: string, record: SpectrumRecord): boolean {
    const { tags } = this;
    if (name === 'scanList') return tags.empty || this.content(name, null, () => this.scan(record), 'scan');
    if (name === 'precursorList') {
      return tags.empty || this.content(name, null, () => this.precursor(record), 'precursor');
    }
    if (name === 'productList') return tags.empty || this.content(name, null, () => this.product(), 'product');
    if (name !== 'binaryDataArrayList') return false;
    return tags.empty || this.content(name, null, () => this.array(record), 'binaryDataArray');
  }

  private scan(record: SpectrumRecord): boolean {
    const { tags } = this;
    if (tags.name !== 'scan') return false;
    const configurationRef = tags.attribute('instrumentConfigurationRef');
    const params = emptySet();
    record.scan ??= { configurationRef, params };
    return tags.empty || this.content('scan', params, () => this.scanWindows());
  }

  private scanWindows(): boolean {
    const { tags } = this;
    if (tags.name !== 'scanWindowList') return false;
    const window = () => tags.name === 'scanWindow' && this.leaf('scanWindow', null);
    return tags.empty || this.content('scanWindowList', null, window, 'scanWindow');
  }

  private product(): boolean {
    const { tags } = this;
    if (tags.name !== 'product') return false;
    const window = () => tags.name === 'isolationWindow' && this.leaf('isolationWindow', null);
    return tags.empty || this.content('product', null, window);
  }

  private precursor(record: SpectrumRecord): boolean {
    const { tags } = this;
    if (tags.name !== 'precursor') return false;
    const precursor: PrecursorText = {
      spectrumRef: tags.attribute('spectrumRef'),
      params: emptySet(),
      window: emptySet(),
      ion: emptySet(),
      activation: emptySet()
    };
    record.precursors.push(precursor);
    return tags.empty || this.content('precursor', precursor.params, (name) => this.precursorChild(name, precursor));
  }

  private precursorChild(name: string, precursor: PrecursorText): boolean {
    const { tags } = this;
    if (name === 'isolationWindow') return this.leaf(name, precursor.window);
    if (name === 'activation') return this.leaf(name, precursor.activation);
    if (name !== 'selectedIonList') return false;
    let set: ParamSet | null = precursor.ion;
    const ion = () => {
      if (tags.name !== 'selectedIon') return false;
      const own = set;
      set = null;
      return this.leaf('selectedIon', own);
    };
    return tags.empty || this.content(name, null, ion, 'selectedIon');
  }

  private array(record: SpectrumRecord): boolean {
    const { tags } = this;
    if (tags.name !== 'binaryDataArray') return false;
    const array: ArrayText = {
      arrayLength: tags.attribute('arrayLength'),
      encodedLength: tags.attribute('encodedLength'),
      hasBinary: false,
      params: emptySet()
    };
    record.arrays.push(array);
    const binary = () => {
      array.hasBinary = true;
      return tags.name === 'binary' && this.leaf('binary', null);
    };
    return tags.empty || this.content('binaryDataArray', array.params, binary);
  }
}

/**
 * The record of a spectrum of the common form.
 * @param xml the spectrum without the text of its `binary` elements
 * @param count number of `<` in it: any that is not the beginning of a tag makes the form unusual
 * @returns null for every other form, those with an error among them
 */
export function quickRecord(xml: string, count: number): SpectrumRecord | null {
  try {
    return new QuickScanner(xml).spectrum(count);
  } catch (error) {
    // An undefined entity: the XML parser's way reports it.
    if (error instanceof CoreError) return null;
    throw error;
  }
}
