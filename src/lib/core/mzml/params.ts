/** Controlled-vocabulary and user parameters of an element, with the referenced groups resolved. */
import { CoreError } from '../errors';
import { attribute, children, type XmlElement } from './xml';

export interface Param {
  /** accession for a cvParam, null for a userParam. */
  accession: string | null;
  name: string;
  value: string;
  unit: string | null;
}

export type ParamGroups = ReadonlyMap<string, Param[]>;

function readParam(element: XmlElement): Param {
  return {
    accession: attribute(element, 'accession'),
    name: attribute(element, 'name') ?? '',
    value: attribute(element, 'value') ?? '',
    unit: attribute(element, 'unitAccession')
  };
}

/** Parameters of one element; looked up by accession, never by the name of the term, which changes between versions. */
export class Params {
  private constructor(private readonly list: Param[]) {}

  /** Referenced groups come first, so that the element's own parameters win. */
  static of(element: XmlElement | null, groups: ParamGroups): Params {
    if (!element) return new Params([]);
    const list: Param[] = [];
    for (const reference of children(element, 'referenceableParamGroupRef')) {
      list.push(...(groups.get(attribute(reference, 'ref') ?? '') ?? []));
    }
    for (const param of children(element, 'cvParam')) list.push(readParam(param));
    for (const param of children(element, 'userParam')) list.push({ ...readParam(param), accession: null });
    return new Params(list);
  }

  get all(): readonly Param[] {
    return this.list;
  }

  has(accession: string): boolean {
    return this.list.some((param) => param.accession === accession);
  }

  /** The last parameter of that accession; userParams that carry the accession as their name count too. */
  find(accession: string): Param | null {
    return (
      this.list.findLast((param) => param.accession === accession) ??
      this.list.findLast((param) => param.accession === null && param.name === accession) ??
      null
    );
  }

  /** The last userParam of that name. */
  user(name: string): string | null {
    return this.list.findLast((param) => param.accession === null && param.name === name)?.value ?? null;
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
    groups.set(attribute(group, 'id') ?? '', [...Params.of(group, new Map()).all]);
  }
  return groups;
}
