/** Controlled-vocabulary and user parameters of an element, with the referenced groups resolved. */
import { CoreError } from '../errors';
import type { ParamSet } from './record';
import { attribute, children, type XmlElement } from './xml';

export interface Param {
  /** accession for a cvParam, null for a userParam. */
  accession: string | null;
  name: string;
  value: string;
  unit: string | null;
}

export type ParamGroups = ReadonlyMap<string, Param[]>;

function readParam(element: XmlElement, controlled: boolean): Param {
  return {
    accession: controlled ? attribute(element, 'accession') : null,
    name: attribute(element, 'name') ?? '',
    value: attribute(element, 'value') ?? '',
    unit: attribute(element, 'unitAccession')
  };
}

/** The parameters written in an element; none where there is no element. */
export function elementParams(element: XmlElement | null): ParamSet {
  if (!element) return { refs: [], own: [] };
  return {
    refs: children(element, 'referenceableParamGroupRef').map((reference) => attribute(reference, 'ref') ?? ''),
    own: [
      ...children(element, 'cvParam').map((param) => readParam(param, true)),
      ...children(element, 'userParam').map((param) => readParam(param, false))
    ]
  };
}

/** Parameters of one element; looked up by accession, never by the name of the term, which changes between versions. */
export class Params {
  private constructor(private readonly list: readonly Param[]) {}

  /** Referenced groups come first, so that the element's own parameters win. */
  static of({ refs, own }: ParamSet, groups: ParamGroups): Params {
    if (refs.length === 0) return new Params(own);
    return new Params([...refs.flatMap((ref) => groups.get(ref) ?? []), ...own]);
  }

  static ofElement(element: XmlElement | null, groups: ParamGroups): Params {
    return Params.of(elementParams(element), groups);
  }

  get all(): readonly Param[] {
    return this.list;
  }

  has(accession: string): boolean {
    for (const param of this.list) if (param.accession === accession) return true;
    return false;
  }

  /** The last parameter of that accession; userParams that carry the accession as their name count too. */
  find(accession: string): Param | null {
    for (let i = this.list.length - 1; i >= 0; i--) if (this.list[i].accession === accession) return this.list[i];
    return this.lastUser(accession);
  }

  /** The last userParam of that name. */
  user(name: string): string | null {
    return this.lastUser(name)?.value ?? null;
  }

  private lastUser(name: string): Param | null {
    for (let i = this.list.length - 1; i >= 0; i--) {
      const param = this.list[i];
      if (param.accession === null && param.name === name) return param;
    }
    return null;
  }

  /**
   * The number behind the first of these accessions that is there, or null.
   * @throws CoreError `bad-number` when the value is no number (a decimal comma, for example).
   */
  number(...accessions: string[]): number | null {
    for (const accession of accessions) {
      const param = this.find(accession);
      if (param && param.value.trim() !== '') return parseNumber(param.value, param.name);
    }
    return null;
  }
}

/**
 * Reads a decimal number as xs:double writes it.
 * @returns null for NaN and infinities, which state nothing.
 * @throws CoreError `bad-number` for anything else that is no number.
 */
export function parseNumber(text: string, what: string): number | null {
  const trimmed = text.trim();
  if (/^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(trimmed)) return Number(trimmed);
  if (/^[+-]?(nan|inf|infinity|1\.#\S+)$/i.test(trimmed)) return null;
  throw new CoreError('bad-number', `"${trimmed.slice(0, 40)}" is no number (${what.slice(0, 60)})`);
}

/** Reads the referenceableParamGroupList. */
export function readParamGroups(list: XmlElement | null): ParamGroups {
  const groups = new Map<string, Param[]>();
  if (!list) return groups;
  for (const group of children(list, 'referenceableParamGroup')) {
    groups.set(attribute(group, 'id') ?? '', [...Params.ofElement(group, new Map()).all]);
  }
  return groups;
}
