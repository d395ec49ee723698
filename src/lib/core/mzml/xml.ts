/** The XML of an mzML file as small trees, by fast-xml-parser; local names only, so any namespace prefix will do. */
import { XMLParser } from 'fast-xml-parser';
import { CoreError } from '../errors';

/** One element: attributes under `@`, children by local name in document order. */
export interface XmlElement {
  readonly '@'?: Readonly<Record<string, string>>;
  readonly [child: string]: unknown;
}

const ENTITIES: Readonly<Record<string, string>> = { lt: '<', gt: '>', amp: '&', quot: '"', apos: "'" };

/** Texts whose only entities are quotes, as many writers put into their titles. */
const QUOTED = /^(?:[^&]|&quot;)*$/;

/**
 * Replaces the five predefined entities and character references.
 * @throws CoreError `doctype` for any other entity, since only a DTD could define it.
 */
export function decodeEntities(text: string): string {
  if (!text.includes('&')) return text;
  if (QUOTED.test(text)) return text.replaceAll('&quot;', '"');
  return text.replace(/&(#x[0-9a-fA-F]{1,6}|#[0-9]{1,7}|[^;&\s]{0,40});?/g, (whole, name: string) => {
    if (name.startsWith('#')) {
      const code = name[1] === 'x' ? parseInt(name.slice(2), 16) : Number(name.slice(1));
      return code > 0 && code <= 0x10ffff ? String.fromCodePoint(code) : '\ufffd';
    }
    const value = Object.hasOwn(ENTITIES, name) && whole.endsWith(';') ? ENTITIES[name] : undefined;
    if (value !== undefined) return value;
    if (!whole.endsWith(';')) return whole;
    throw new CoreError('doctype', `The file uses the entity "${name.slice(0, 40)}", which mzML does not define`);
  });
}

function makeParser(removeNSPrefix: boolean): XMLParser {
  return new XMLParser({
    ignoreAttributes: false,
    attributeNamePrefix: '',
    attributesGroupName: '@',
    parseTagValue: false,
    parseAttributeValue: false,
    removeNSPrefix,
    isArray: (_name, _path, _leaf, isAttribute) => !isAttribute,
    processEntities: false,
    ignoreDeclaration: true,
    ignorePiTags: true,
    trimValues: true,
    jPath: false
  });
}

// Taking prefixes off costs a third of the parsing, and hardly any file has them.
const parser = makeParser(false);
const prefixParser = makeParser(true);
const PREFIXED_TAG = /<\/?[^\s<>/:"'!?]+:/;

/**
 * Parses a piece of XML with one root element and returns that element with its local name.
 * @throws CoreError `xml` when it cannot be parsed or has no element.
 */
export function parseXml(text: string): { name: string; element: XmlElement } {
  let parsed: unknown;
  try {
    parsed = (PREFIXED_TAG.test(text) ? prefixParser : parser).parse(text);
  } catch (error) {
    throw new CoreError('xml', `The XML cannot be parsed: ${error instanceof Error ? error.message : String(error)}`);
  }
  for (const [name, list] of Object.entries(parsed as Record<string, unknown>)) {
    if (name === '#text' || !Array.isArray(list)) continue;
    const first: unknown = list[0];
    return { name, element: isElement(first) ? first : {} };
  }
  throw new CoreError('xml', 'The XML holds no element');
}

function isElement(value: unknown): value is XmlElement {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

const EMPTY: XmlElement = {};

/** All children of that name; an element without attributes and content counts as an empty one. */
export function children(element: XmlElement, name: string): XmlElement[] {
  const list = Object.hasOwn(element, name) ? element[name] : undefined;
  if (!Array.isArray(list)) return [];
  return list.map((item: unknown) => (isElement(item) ? item : EMPTY));
}

/** The first child of that name, or null. */
export function child(element: XmlElement, name: string): XmlElement | null {
  return children(element, name)[0] ?? null;
}

/** An attribute with its entities decoded, or null. */
export function attribute(element: XmlElement, name: string): string | null {
  const group = element['@'];
  const value = group && Object.hasOwn(group, name) ? group[name] : undefined;
  return value === undefined ? null : decodeEntities(value);
}
