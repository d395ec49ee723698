/**
 * The spectra of a file are nearly all written alike: the same tags and terms, only other values. A template is the text
 * of one such spectrum with its values left out, and its record with the places where they belong. Another spectrum
 * with the same text between its values has the same record but for these, so that nothing needs to be scanned again.
 */
import { CoreError } from '../errors';
import { detached } from './detached';
import { quickRecord } from './quick-scan';
import type { Param } from './params';
import type { ArrayText, ParamSet, PrecursorText, SpectrumRecord } from './record';
import { decodeEntities } from './xml';

/** Attributes that differ between spectra; every other one belongs to the text that must be the same. */
const VALUE =
  / (?:value|id|index|spectrumRef|externalSpectrumID|defaultArrayLength|arrayLength|encodedLength)="([^"]*)"/g;
const MARKER = '~value';
const WHOLE_MARKER = /^~value(\d+)~$/;
const QUOTE = 34;
const SPACE = 32;

const REFERENCE = 2;
/** 1 for the letters of a plainly written value, printable ASCII without `"`, `<` and `>`; 3 for `&`, which may stand for another. */
const LETTERS = Uint8Array.from({ length: 256 }, (_value, code) => {
  const letter = String.fromCharCode(code);
  if (code < 32 || code >= 127 || '"<>'.includes(letter)) return 0;
  return letter === '&' ? 1 | REFERENCE : 1;
});

/** Index of the double quote that ends the value beginning at `at`, or -1 when the value is not plainly written. */
function valueEnd(text: string, at: number): number {
  let i = at;
  let code = text.charCodeAt(i);
  while (LETTERS[code] > 0) code = text.charCodeAt(++i);
  return code === QUOTE ? i : -1;
}

/** As `text.startsWith(part, at)`, but engines compare whole texts several times as fast. */
function isAt(text: string, part: string, at: number): boolean {
  return text.slice(at, at + part.length) === part;
}

/**
 * The value in [from, to) as the XML parser hands it out: without space at its ends, references replaced.
 * @throws CoreError `doctype` for an entity that mzML does not define
 */
function valueOf(text: string, from: number, to: number): string {
  const value = text.slice(from, to);
  const isTrimmed = text.charCodeAt(from) !== SPACE && text.charCodeAt(to - 1) !== SPACE;
  return decodeEntities(isTrimmed ? value : value.trim());
}

/** Values of the spectrum at hand, by number. */
type Values = readonly string[];
type Make<T> = (values: Values) => T;

function markerOf(text: string | null): number | null {
  const found = text === null ? null : WHOLE_MARKER.exec(text);
  return found ? Number(found[1]) : null;
}

function makeText(text: string | null): Make<string | null> {
  const slot = markerOf(text);
  return slot === null ? () => text : (values) => values[slot];
}

function makeParam(param: Param): Make<Param> {
  const slot = markerOf(param.value);
  if (slot === null) return () => param;
  const { accession, name, unit } = param;
  return (values) => ({ accession, name, value: values[slot], unit });
}

/** Sets without any value are shared by all records. */
function makeSet(set: ParamSet): Make<ParamSet> {
  if (set.own.every((param) => markerOf(param.value) === null)) return () => set;
  const params = set.own.map(makeParam);
  return (values) => {
    const own: Param[] = [];
    for (const param of params) own.push(param(values));
    return { refs: set.refs, own };
  };
}

function makePrecursor(written: PrecursorText): Make<PrecursorText> {
  const spectrumRef = makeText(written.spectrumRef);
  const [params, window] = [makeSet(written.params), makeSet(written.window)];
  const [ion, activation] = [makeSet(written.ion), makeSet(written.activation)];
  return (values) => ({
    spectrumRef: spectrumRef(values),
    params: params(values),
    window: window(values),
    ion: ion(values),
    activation: activation(values)
  });
}

function makeArray(written: ArrayText): Make<ArrayText> {
  const [arrayLength, encodedLength] = [makeText(written.arrayLength), makeText(written.encodedLength)];
  const params = makeSet(written.params);
  return (values) => ({
    arrayLength: arrayLength(values),
    encodedLength: encodedLength(values),
    hasBinary: written.hasBinary,
    params: params(values)
  });
}

function makeRecord(written: SpectrumRecord): Make<SpectrumRecord> {
  const [id, defaultArrayLength] = [makeText(written.id), makeText(written.defaultArrayLength)];
  const params = makeSet(written.params);
  const { scan } = written;
  const scanParams = scan && makeSet(scan.params);
  const precursors = written.precursors.map(makePrecursor);
  const arrays = written.arrays.map(makeArray);
  return (values) => ({
    id: id(values),
    defaultArrayLength: defaultArrayLength(values),
    params: params(values),
    scan: scan && scanParams && { configurationRef: scan.configurationRef, params: scanParams(values) },
    precursors: precursors.map((make) => make(values)),
    arrays: arrays.map((make) => make(values))
  });
}

/** A spectrum that a template fits. */
export interface TemplateMatch {
  record: SpectrumRecord;
  /** begin and end of each base64 text, alternating. */
  binaries: number[];
  /** index behind the spectrum. */
  end: number;
}

export class Template {
  private constructor(
    /** the text before each value, and behind the last one. */
    private readonly constants: readonly string[],
    /** whether each value is a base64 text. */
    private readonly isBinary: readonly boolean[],
    private readonly make: Make<SpectrumRecord>
  ) {}

  /**
   * Makes the template of a spectrum of the common form.
   * @param text the spectrum and nothing else
   * @param binaries begin and end of each base64 text in it, alternating
   * @returns null where the values cannot be told apart from the text around them
   */
  static of(text: string, binaries: readonly number[]): Template | null {
    if (text.includes(MARKER)) return null;
    const constants: string[] = [];
    const isBinary: boolean[] = [];
    const markedBinaries: number[] = [];
    let marked = '';
    let open = 0;
    const take = (from: number, to: number) => {
      const end = to < 0 ? text.length : to;
      let begin = from;
      for (const found of text.slice(from, end).matchAll(VALUE)) {
        const valueAt = from + found.index + found[0].length - 1 - found[1].length;
        constants.push(text.slice(open, valueAt));
        marked += `${text.slice(begin, valueAt)}${MARKER}${isBinary.length}~`;
        isBinary.push(false);
        begin = open = valueAt + found[1].length;
      }
      marked += text.slice(begin, end);
    };
    let from = 0;
    for (let i = 0; i < binaries.length; i += 2) {
      take(from, binaries[i]);
      constants.push(text.slice(open, binaries[i]));
      markedBinaries.push(marked.length, marked.length);
      isBinary.push(true);
      from = open = binaries[i + 1];
    }
    take(from, -1);
    constants.push(text.slice(open));
    // What the scanner makes of the text with markers for values shows where each value belongs.
    const record = quickRecord(marked, 0, markedBinaries);
    return record && new Template(constants, isBinary, makeRecord(record));
  }

  /**
   * Reads the spectrum at `at`; null when its text is not that of the template.
   * @throws CoreError `doctype` for an entity that mzML does not define
   */
  match(text: string, at: number): TemplateMatch | null {
    const { constants, isBinary } = this;
    const values: string[] = [];
    const binaries: number[] = [];
    let i = at;
    for (let k = 0; k < isBinary.length; k++) {
      if (!isAt(text, constants[k], i)) return null;
      const begin = i + constants[k].length;
      if (isBinary[k]) {
        i = text.indexOf('<', begin);
        if (i < 0) return null;
        binaries.push(begin, i);
        values.push('');
      } else {
        i = valueEnd(text, begin);
        if (i < 0) return null;
        values.push(valueOf(text, begin, i));
      }
    }
    const last = constants[constants.length - 1];
    if (!isAt(text, last, i)) return null;
    return { record: this.make(values), binaries, end: i + last.length };
  }
}

/** So many templates are kept; a file with more kinds of spectra is scanned. */
const KEPT = 12;
/** Making one costs as much as scanning a few spectra; it must pay. */
const MADE_AT_ONCE = 40;
const HITS_FOR_ONE = 10;

/** The templates of a file, the one used last in front. */
export class Templates {
  private readonly list: Template[] = [];
  private hits = 0;
  private made = 0;

  /** Reads the spectrum at `at`, or null where no template fits it. */
  match(text: string, at: number): TemplateMatch | null {
    try {
      return this.matchAny(text, at);
    } catch (error) {
      // An undefined entity: the XML parser's way reports it.
      if (error instanceof CoreError) return null;
      throw error;
    }
  }

  private matchAny(text: string, at: number): TemplateMatch | null {
    const { list } = this;
    for (let i = 0; i < list.length; i++) {
      const found = list[i].match(text, at);
      if (!found) continue;
      if (i > 0) list.unshift(...list.splice(i, 1));
      this.hits++;
      return found;
    }
    return null;
  }

  /**
   * Takes the spectrum in [from, to), which none fitted, as a template for the next ones.
   * @param binaries begin and end of each base64 text as indexes into `text`, alternating
   */
  learn(text: string, from: number, to: number, binaries: readonly number[]): void {
    if (this.made >= MADE_AT_ONCE + this.hits / HITS_FOR_ONE) return;
    this.made++;
    const template = Template.of(
      detached(text.slice(from, to)),
      binaries.map((index) => index - from)
    );
    if (!template) return;
    this.list.unshift(template);
    this.list.length = Math.min(this.list.length, KEPT);
  }
}
