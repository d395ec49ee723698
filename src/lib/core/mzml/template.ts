/**
 * The spectra of a file are nearly all written alike: the same tags and terms, only other values. A template is the text
 * of one such spectrum with its values left out, and its record with the places where they belong. Another spectrum
 * with the same text between its values has the same record but for these, so that nothing needs to be scanned again.
 */
import { CoreError } from '../errors';
import { detached } from './detached';
import { KNOWN_ACCESSIONS } from './cv';
import { quickRecord } from './quick-scan';
import type { Param } from './params';
import type { ArrayText, ParamSet, PrecursorText, SpectrumRecord } from './record';
import { decodeEntities } from './xml';

/** Attributes that differ between spectra. Every other one, and what is empty, belongs to the text that must be the same. */
const VALUE =
  / (?:value|id|index|spectrumRef|externalSpectrumID|defaultArrayLength|arrayLength|encodedLength)="([^"]+)"/g;
const MARKER = '~value';
const WHOLE_MARKER = /^~value(\d+)~$/;
const QUOTE = 34;
const SPACE = 32;

const AMPERSAND = 38;
const IS_PLAIN = 1;
const IS_REFERENCE = 2;
/** What letters a plainly written value may hold: printable ASCII without `"`, `<` and `>`; `&` may begin a reference. */
const LETTERS = Uint8Array.from({ length: 256 }, (_value, code) => {
  if (code < 32 || code >= 127 || '"<>'.includes(String.fromCharCode(code))) return 0;
  return code === AMPERSAND ? IS_REFERENCE : IS_PLAIN;
});

/** Index behind the plain letters from `at` on. */
function plainEnd(text: string, at: number): number {
  let i = at;
  while (LETTERS[text.charCodeAt(i)] === IS_PLAIN) i++;
  return i;
}

/** Index of the double quote behind the letters from `at` on that a value may hold, or -1 where another letter stands. */
function valueEnd(text: string, at: number): number {
  let i = at;
  while (LETTERS[text.charCodeAt(i)] > 0) i++;
  return text.charCodeAt(i) === QUOTE ? i : -1;
}

/** As `text.startsWith(part, at)`, but engines compare whole texts several times as fast. */
function isAt(text: string, part: string, at: number): boolean {
  return text.slice(at, at + part.length) === part;
}

/** The value in [from, to) as the XML parser hands it out, without space at its ends. */
function trimmed(text: string, from: number, to: number): string {
  const value = text.slice(from, to);
  return text.charCodeAt(from) === SPACE || text.charCodeAt(to - 1) === SPACE ? value.trim() : value;
}

/** Values of the spectrum at hand, by number. */
type Values = readonly string[];
type Make<T> = (values: Values) => T;

/** Makes the way to a record from a record that holds markers for values. */
class RecordMaker {
  /** numbers of the values that go into the record. */
  readonly used = new Set<number>();

  record(written: SpectrumRecord): Make<SpectrumRecord> {
    const [id, defaultArrayLength] = [this.text(written.id), this.text(written.defaultArrayLength)];
    const params = this.set(written.params);
    const { scan } = written;
    const scanParams = scan && this.set(scan.params);
    const precursors = written.precursors.map((precursor) => this.precursor(precursor));
    const arrays = written.arrays.map((array) => this.array(array));
    return (values) => ({
      id: id(values),
      defaultArrayLength: defaultArrayLength(values),
      params: params(values),
      scan: scan && scanParams && { configurationRef: scan.configurationRef, params: scanParams(values) },
      precursors: precursors.map((make) => make(values)),
      arrays: arrays.map((make) => make(values))
    });
  }

  private slot(text: string | null): number | null {
    const found = text === null ? null : WHOLE_MARKER.exec(text);
    if (!found) return null;
    this.used.add(Number(found[1]));
    return Number(found[1]);
  }

  private text(text: string | null): Make<string | null> {
    const slot = this.slot(text);
    return slot === null ? () => text : (values) => values[slot];
  }

  private param(param: Param): Make<Param> {
    const { accession, name, unit } = param;
    const isRead = accession === null || KNOWN_ACCESSIONS.has(accession);
    const slot = isRead ? this.slot(param.value) : null;
    if (slot !== null) return (values) => ({ accession, name, value: values[slot], unit });
    // Nobody asks for the value of a term that the reader does not know.
    const same = isRead ? param : { ...param, value: '' };
    return () => same;
  }

  private set({ refs, own }: ParamSet): Make<ParamSet> {
    const params = own.map((param) => this.param(param));
    return (values) => {
      const made: Param[] = [];
      for (const param of params) made.push(param(values));
      return { refs, own: made };
    };
  }

  private precursor(written: PrecursorText): Make<PrecursorText> {
    const spectrumRef = this.text(written.spectrumRef);
    const [params, window] = [this.set(written.params), this.set(written.window)];
    const [ion, activation] = [this.set(written.ion), this.set(written.activation)];
    return (values) => ({
      spectrumRef: spectrumRef(values),
      params: params(values),
      window: window(values),
      ion: ion(values),
      activation: activation(values)
    });
  }

  private array(written: ArrayText): Make<ArrayText> {
    const { hasBinary } = written;
    const [arrayLength, encodedLength] = [this.text(written.arrayLength), this.text(written.encodedLength)];
    const params = this.set(written.params);
    return (values) => ({
      arrayLength: arrayLength(values),
      encodedLength: encodedLength(values),
      hasBinary,
      params: params(values)
    });
  }
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
    /** whether each value goes into the record. */
    private readonly isUsed: readonly boolean[],
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
    if (!record) return null;
    const maker = new RecordMaker();
    const make = maker.record(record);
    const isUsed = isBinary.map((_value, k) => maker.used.has(k));
    return new Template(constants, isBinary, isUsed, make);
  }

  /**
   * Reads the spectrum at `at`; null when its text is not that of the template.
   * @throws CoreError `doctype` for an entity that mzML does not define
   */
  match(text: string, at: number): TemplateMatch | null {
    const { constants, isBinary, isUsed } = this;
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
        i = plainEnd(text, begin);
        if (text.charCodeAt(i) === QUOTE) {
          values.push(isUsed[k] ? trimmed(text, begin, i) : '');
          continue;
        }
        i = valueEnd(text, i);
        if (i < 0) return null;
        values.push(decodeEntities(trimmed(text, begin, i)));
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
