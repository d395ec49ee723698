/**
 * Reads the tags of plainly written XML one after the other. It refuses (returns null or false) whatever could be read
 * in more than one way: single quotes, space around `=`, attributes twice, names it does not know, text between tags.
 */
import { KNOWN_ACCESSIONS } from './cv';
import type { Param } from './params';
import { decodeEntities } from './xml';

const TAB = 9;
const LF = 10;
const CR = 13;
const SPACE = 32;
const QUOTE = 34;
const SLASH = 47;
const LT = 60;
const EQUALS = 61;
const GT = 62;
const LAST_ASCII = 126;

/** Attributes that mzML 1.1 gives to the elements of a spectrum. */
const ATTRIBUTES = new Set([
  ...['id', 'index', 'spotID', 'defaultArrayLength', 'dataProcessingRef', 'sourceFileRef', 'count', 'ref'],
  ...['instrumentConfigurationRef', 'spectrumRef', 'externalSpectrumID', 'externalNativeID', 'encodedLength'],
  ...['arrayLength']
]);

function isSpace(code: number): boolean {
  return code === SPACE || code === LF || code === CR || code === TAB;
}

export class TagReader {
  /** of the tag last met. */
  name = '';
  /** whether the tag whose attributes were last read has no content. */
  empty = false;
  /** number of tags met so far. */
  count = 0;
  private at = 0;
  private readonly values: (string | null)[] = [];
  private readonly hasReference: boolean;
  private readonly hasReturn: boolean;

  constructor(private readonly text: string) {
    this.hasReference = text.includes('&');
    this.hasReturn = text.includes('\r');
  }

  /** Goes to the next tag and reads its name; 'none' when something else comes first. */
  next(): 'start' | 'end' | 'none' {
    const { text } = this;
    this.skipSpace();
    if (text.charCodeAt(this.at) !== LT) return 'none';
    this.count++;
    const closing = text.charCodeAt(this.at + 1) === SLASH;
    const from = this.at + (closing ? 2 : 1);
    if (text.startsWith('cvParam ', from)) {
      this.name = 'cvParam';
      this.at = from + 7;
      return closing ? 'none' : 'start';
    }
    let to = from;
    for (let code = text.charCodeAt(to); code > SPACE && code !== GT && code !== SLASH;) code = text.charCodeAt(++to);
    this.name = text.slice(from, to);
    this.at = to;
    if (!closing) return 'start';
    if (text.charCodeAt(to) !== GT) return 'none';
    this.at++;
    return 'end';
  }

  /** True behind the last tag. */
  atEnd(): boolean {
    return this.at === this.text.length;
  }

  /** Reads the attributes of a start tag that is no parameter; false for a form that is not plain. */
  readAttributes(): boolean {
    this.values.length = 0;
    for (;;) {
      const step = this.nextAttribute();
      if (step !== 'attribute') return step === 'end';
      const equals = this.text.indexOf('=', this.at);
      const name = this.text.slice(this.at, equals);
      if (!ATTRIBUTES.has(name) || this.values.includes(name)) return false;
      this.at = equals;
      const value = this.value();
      if (value === null) return false;
      this.values.push(name, value);
    }
  }

  /** An attribute read by `readAttributes`; null where it is not there. */
  attribute(name: string): string | null {
    for (let i = 0; i < this.values.length; i += 2) if (this.values[i] === name) return this.values[i + 1];
    return null;
  }

  /** Reads the rest of a cvParam or userParam; null for a form that is not plain. */
  param(controlled: boolean): Param | null {
    let accession: string | null = null;
    let name: string | null = null;
    let value: string | null = null;
    let unit: string | null = null;
    for (;;) {
      const step = this.nextAttribute();
      if (step === 'end' && this.empty) return { accession, name: name ?? '', value: value ?? '', unit };
      if (step !== 'attribute') return null;
      if (this.takes('name')) {
        if (name !== null || (name = this.value()) === null) return null;
      } else if (this.takes('value')) {
        if (value !== null || (value = this.value()) === null) return null;
      } else if (this.takes('unitAccession')) {
        if (unit !== null || (unit = this.value()) === null) return null;
      } else if (controlled && this.takes('accession')) {
        if (accession !== null || (accession = this.accession()) === null) return null;
      } else if (!this.passOver(controlled)) return null;
    }
  }

  /** Passes over an attribute that nobody asks for. */
  private passOver(controlled: boolean): boolean {
    const known =
      this.takes('cvRef') ||
      this.takes('unitCvRef') ||
      this.takes('unitName') ||
      (!controlled && (this.takes('type') || this.takes('accession')));
    if (!known || this.text.charCodeAt(this.at) !== EQUALS || this.text.charCodeAt(this.at + 1) !== QUOTE) return false;
    const end = this.text.indexOf('"', this.at + 2);
    this.at = end + 1;
    return end >= 0;
  }

  private takes(name: string): boolean {
    const { text, at } = this;
    if (text.charCodeAt(at) !== name.charCodeAt(0) || !text.startsWith(name, at)) return false;
    if (text.charCodeAt(at + name.length) !== EQUALS) return false;
    this.at = at + name.length;
    return true;
  }

  private skipSpace(): boolean {
    const { text, at } = this;
    while (isSpace(text.charCodeAt(this.at))) this.at++;
    return this.at > at;
  }

  private nextAttribute(): 'attribute' | 'end' | 'none' {
    const spaced = this.skipSpace();
    const code = this.text.charCodeAt(this.at);
    if (code === GT) {
      this.empty = false;
      this.at++;
      return 'end';
    }
    if (code === SLASH) {
      this.empty = true;
      this.at += 2;
      return this.text.charCodeAt(this.at - 1) === GT ? 'end' : 'none';
    }
    return spaced ? 'attribute' : 'none';
  }

  /** The value behind `=`; null when it is not plain. */
  private value(): string | null {
    const { text } = this;
    const from = this.at + 2;
    if (text.charCodeAt(this.at) !== EQUALS || text.charCodeAt(this.at + 1) !== QUOTE) return null;
    const to = text.indexOf('"', from);
    if (to < 0) return null;
    this.at = to + 1;
    if (to === from) return '';
    let value = text.slice(from, to);
    if (this.hasReturn && value.includes('\r')) return null;
    if (isEdge(text.charCodeAt(from)) || isEdge(text.charCodeAt(to - 1))) value = value.trim();
    return this.hasReference ? decodeEntities(value) : value;
  }

  /** As `value`; the accessions that the reader knows come as one and the same text, which is quick to compare. */
  private accession(): string | null {
    const { text, at } = this;
    if (text.startsWith('="MS:', at) && text.charCodeAt(at + 12) === QUOTE) {
      let number = 0;
      for (let i = at + 5; i < at + 12; i++) number = number * 10 + text.charCodeAt(i) - 48;
      const known = KNOWN_ACCESSIONS.get(number);
      if (known !== undefined && text.startsWith(known, at + 2)) {
        this.at = at + 13;
        return known;
      }
    }
    return this.value();
  }
}

/** True for a character that trimming might take off. */
function isEdge(code: number): boolean {
  return code <= SPACE || code > LAST_ASCII;
}
