import { CoreError } from '../errors';
import { type Composition } from '../model';
import { ADDUCTS, type Adduct } from './adducts';
import { add, formatFormula, parseFormula } from './composition';

/** Short names of solvents and buffers that are written inside adduct names. */
const SHORT_NAMES: Readonly<Record<string, string>> = {
  ACN: 'C2H3N',
  MeOH: 'CH4O',
  FA: 'CH2O2',
  HAc: 'C2H4O2',
  AcOH: 'C2H4O2',
  TFA: 'C2HF3O2',
  DMSO: 'C2H6OS'
};

const badAdduct = (name: string, what: string) =>
  new CoreError(
    'bad-adduct',
    `The ion type "${name.slice(0, 60)}" cannot be read: ${what}.`,
    undefined,
    'Write it as [M+H]+, [M+Na]+, [M-H]-, [2M+H]+, [M+2H]2+, [M]+ (pre-charged) or [M]+• (radical cation).'
  );

/** Takes [M+H]+, M+H+, [M+H]1+, [M+2H]+2, M+., [M]+*, [M]•+ and the like apart. */
function split(name: string) {
  const text = name.replace(/\s+/g, '').replace(/[−–]/g, '-').replace(/⁺/g, '+').replace(/⁻/g, '-');
  const radical = /[•.*·]/.test(text);
  const plain = text.replace(/[•.*·]/g, '');
  const match =
    /^\[(?<n>\d?)M(?<parts>.*)\](?:(?<count>\d*)(?<sign>[+-])|(?<sign2>[+-])(?<count2>\d+))$/.exec(plain) ??
    /^(?<n>\d?)M(?<parts>(?:[+-]\d*[A-Za-z]\w*)*)(?<count>)(?<sign>[+-])$/.exec(plain);
  if (!match?.groups) throw badAdduct(name, 'it has not the form [M…]charge');
  const { n, parts, count, sign, sign2, count2 } = match.groups;
  return {
    molecules: Number(n || 1),
    parts,
    radical,
    charge: ((sign ?? sign2) === '+' ? 1 : -1) * Number((count ?? count2) || 1)
  };
}

function readParts(name: string, parts: string): { gain: Composition; loss: Composition } {
  let gain: Composition = {};
  let loss: Composition = {};
  let used = 0;
  for (const match of parts.matchAll(/([+-])(\d*)([A-Z][A-Za-z0-9]*)/g)) {
    const [whole, sign, times, text] = match;
    let unit: Composition;
    try {
      unit = parseFormula(SHORT_NAMES[text] ?? text);
    } catch {
      throw badAdduct(name, `"${text}" is neither a formula nor a known solvent`);
    }
    if (sign === '+') gain = add(gain, unit, Number(times || 1));
    else loss = add(loss, unit, Number(times || 1));
    used += whole.length;
  }
  if (used !== parts.length) throw badAdduct(name, `"${parts}" is not understood`);
  return { gain, loss };
}

/** Gain and loss share no atoms afterwards, so that [M+H-H2O]+ and [M-OH]+ compare equal. */
const netKey = (a: Pick<Adduct, 'molecules' | 'gain' | 'loss' | 'charge' | 'oddElectron'>) =>
  `${a.molecules} ${a.charge} ${a.oddElectron} ${formatFormula(add(a.gain, a.loss, -1))}`;

const BY_KEY = new Map([...ADDUCTS].reverse().map((a) => [netKey(a), a]));

/**
 * Reads the name of an ion type. Known ones come back under their table name; others are worked out from the
 * atoms named, e.g. "[M+Rb…]" fails but "[M+H+CH3OH]+" works.
 * @throws CoreError bad-adduct
 */
export function parseAdduct(name: string): Adduct {
  const { molecules, parts, radical, charge } = split(name);
  if (molecules < 1 || Math.abs(charge) > 20 || charge === 0) throw badAdduct(name, 'molecules or charge make no ion');
  const { gain, loss } = readParts(name, parts);
  const parsed = { molecules, gain, loss, charge, oddElectron: radical };
  const known = BY_KEY.get(netKey(parsed)) ?? BY_KEY.get(netKey({ ...parsed, oddElectron: !radical }));
  if (known && (known.oddElectron === radical || parts !== '' || charge < 0)) return known;
  const shown = name.replace(/\s+/g, '');
  return { ...parsed, name: shown.startsWith('[') ? shown : `[${shown.slice(0, -1)}]${shown.slice(-1)}`, sources: [] };
}
