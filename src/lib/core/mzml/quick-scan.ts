/**
 * Takes the record of a spectrum straight from its XML where that has the common form: known elements and attributes
 * in the order of the schema, plainly written, no comments. Anything else is left to the XML parser, whose answer this
 * one must equal; a form is taken here only when it cannot be read in two ways.
 */
import { CoreError } from '../errors';
import { matchCvParam, matchTag, matchUserParam, type Tag } from './plain-tag';
import type { ArrayText, ParamSet, PrecursorText, SpectrumRecord } from './record';

const emptySet = (): ParamSet => ({ refs: [], own: [] });

/** Where an element may stand, and a bit for those that may come once; 0 for those that may come again. */
const PLACES: ReadonlyMap<string, { parents: readonly string[]; once: number }> = new Map([
  ['scanList', { parents: ['spectrum'], once: 1 }],
  ['precursorList', { parents: ['spectrum'], once: 2 }],
  ['productList', { parents: ['spectrum'], once: 4 }],
  ['binaryDataArrayList', { parents: ['spectrum'], once: 8 }],
  ['scan', { parents: ['scanList'], once: 0 }],
  ['scanWindowList', { parents: ['scan'], once: 1 }],
  ['scanWindow', { parents: ['scanWindowList'], once: 0 }],
  ['precursor', { parents: ['precursorList'], once: 0 }],
  ['product', { parents: ['productList'], once: 0 }],
  ['isolationWindow', { parents: ['precursor', 'product'], once: 1 }],
  ['selectedIonList', { parents: ['precursor'], once: 2 }],
  ['activation', { parents: ['precursor'], once: 4 }],
  ['selectedIon', { parents: ['selectedIonList'], once: 0 }],
  ['binaryDataArray', { parents: ['binaryDataArrayList'], once: 0 }],
  ['binary', { parents: ['binaryDataArray'], once: 1 }]
]);

interface Frame {
  name: string;
  /** null: nobody asks for the parameters in here. */
  set: ParamSet | null;
  /** bits of the children met. */
  met: number;
}

/** Length of a plain `<binary>`, the only form that the cutter knows. */
const BINARY_TAG = 8;
const C = 99;
const U = 117;

class QuickScanner {
  readonly record: SpectrumRecord;
  private readonly frames: Frame[];
  private top: Frame;
  private precursor: PrecursorText | null = null;
  private array: ArrayText | null = null;
  private ionTaken = false;
  private nextBinary = 0;

  /** @param binaries begin and end of each base64 text, alternating, as indexes into `text` */
  constructor(
    private readonly text: string,
    spectrum: Tag,
    private readonly binaries: readonly number[]
  ) {
    this.record = {
      id: spectrum.attributes.get('id') ?? null,
      defaultArrayLength: spectrum.attributes.get('defaultArrayLength') ?? null,
      params: emptySet(),
      scan: null,
      precursors: [],
      arrays: []
    };
    this.top = { name: 'spectrum', set: this.record.params, met: 0 };
    this.frames = [];
  }

  /** Reads up to the end tag of the spectrum. True when all of it was common. */
  run(from: number): boolean {
    const { text } = this;
    let at = from;
    for (;;) {
      const letter = text.charCodeAt(at + 1);
      if (letter === C || letter === U) {
        const found = letter === C ? matchCvParam(text, at) : matchUserParam(text, at);
        if (!found || !this.add(found.param)) return false;
        at = found.end;
        continue;
      }
      const tag = matchTag(text, at);
      if (!tag) return false;
      if (tag.kind !== 'end') {
        if (!this.open(tag)) return false;
        if (tag.name !== 'binary') at = tag.end;
        else if (this.binaries[this.nextBinary] === at + BINARY_TAG) at = this.binaries[this.nextBinary + 1];
        else return false;
        if (tag.name === 'binary') this.nextBinary += 2;
      } else {
        at = tag.end;
        if (tag.name !== this.top.name) return false;
        const outer = this.frames.pop();
        if (!outer) return this.nextBinary === this.binaries.length;
        this.top = outer;
      }
    }
  }

  /** A record has its cvParams first; where the file has not, this is no common form. */
  private add(param: ParamSet['own'][number]): boolean {
    const own = this.top.set?.own;
    if (!own) return true;
    if (param.accession !== null && own.length > 0 && own[own.length - 1].accession === null) return false;
    own.push(param);
    return true;
  }

  private open(tag: Tag): boolean {
    const { name } = tag;
    if (name === 'referenceableParamGroupRef') {
      this.top.set?.refs.push(tag.attributes.get('ref') ?? '');
      return tag.kind === 'empty';
    }
    const place = PLACES.get(name);
    if (!place || !place.parents.includes(this.top.name) || (this.top.met & place.once) !== 0) return false;
    this.top.met |= place.once;
    const inside = this.top.name;
    const set = this.begin(name, inside, tag.attributes);
    if (tag.kind === 'start') {
      this.frames.push(this.top);
      this.top = { name, set, met: 0 };
    }
    return true;
  }

  private begin(name: string, inside: string, attributes: Tag['attributes']): ParamSet | null {
    if (name === 'scan') return this.beginScan(attributes.get('instrumentConfigurationRef') ?? null);
    if (name === 'precursor') return this.beginPrecursor(attributes.get('spectrumRef') ?? null);
    if (name === 'binaryDataArray') return this.beginArray(attributes);
    if (name === 'isolationWindow') return inside === 'precursor' ? (this.precursor?.window ?? null) : null;
    if (name === 'activation') return this.precursor?.activation ?? null;
    if (name === 'selectedIon') {
      const first = !this.ionTaken;
      this.ionTaken = true;
      return first ? (this.precursor?.ion ?? null) : null;
    }
    if (name === 'binary' && this.array) this.array.hasBinary = true;
    return null;
  }

  private beginScan(configurationRef: string | null): ParamSet | null {
    if (this.record.scan) return null;
    const params = emptySet();
    this.record.scan = { configurationRef, params };
    return params;
  }

  private beginPrecursor(spectrumRef: string | null): ParamSet {
    const params = emptySet();
    this.precursor = { spectrumRef, params, window: emptySet(), ion: emptySet(), activation: emptySet() };
    this.record.precursors.push(this.precursor);
    this.ionTaken = false;
    return params;
  }

  private beginArray(attributes: Tag['attributes']): ParamSet {
    const params = emptySet();
    this.array = {
      arrayLength: attributes.get('arrayLength') ?? null,
      encodedLength: attributes.get('encodedLength') ?? null,
      hasBinary: false,
      params
    };
    this.record.arrays.push(this.array);
    return params;
  }
}

/**
 * The record of a spectrum of the common form.
 * @param text holds the spectrum from `start` to the end of its end tag
 * @param binaries begin and end of each base64 text in it, alternating
 * @returns null for every other form, those with an error among them
 */
export function quickRecord(text: string, start: number, binaries: readonly number[]): SpectrumRecord | null {
  try {
    const spectrum = matchTag(text, start);
    if (spectrum?.kind !== 'start' || spectrum.name !== 'spectrum') return null;
    const scanner = new QuickScanner(text, spectrum, binaries);
    return scanner.run(spectrum.end) ? scanner.record : null;
  } catch (error) {
    // An undefined entity: the XML parser's way reports it.
    if (error instanceof CoreError) return null;
    throw error;
  }
}
