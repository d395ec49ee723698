import type { FrozenSpectrum, RevisionContent } from '../content';

const list = (items: readonly string[]): string =>
  items.length < 2 ? (items[0] ?? '') : `${items.slice(0, -1).join(', ')} and ${items.at(-1)}`;
const unique = <T>(items: readonly T[]): T[] => [...new Set(items)];
const span = (low: number, high: number): string => (low === high ? String(low) : `${low} to ${high}`);
const range = (values: readonly number[]): string => span(Math.min(...values), Math.max(...values));
const count = (n: number, word: string): string => `${n} ${word}${n === 1 ? '' : 's'}`;

const ANALYSERS: Record<FrozenSpectrum['analyser'], string> = {
  orbitrap: 'orbitrap',
  'ft-icr': 'FT-ICR',
  tof: 'time-of-flight',
  quadrupole: 'quadrupole',
  'ion-trap': 'ion trap',
  sector: 'sector',
  unknown: 'analyser not stated'
};

function energyText(spectra: readonly FrozenSpectrum[]): string {
  const energies = spectra.flatMap((s) => s.energies);
  if (!energies.length) return 'collision energy not stated in the file';
  const units = unique(spectra.map((s) => s.energyUnit).filter((unit) => unit !== null));
  const unit = units.length === 1 ? (units[0] === '%' ? ' % (normalised)' : ` ${units[0]}`) : ' (unit not stated)';
  return `collision energy ${range(energies)}${unit}`;
}

function isolationText(spectra: readonly FrozenSpectrum[]): string {
  const widths = spectra
    .map(({ isolation }) =>
      isolation?.lower != null && isolation.upper != null ? isolation.lower + isolation.upper : null
    )
    .filter((width) => width !== null)
    .map((width) => Number(width.toFixed(2)));
  return widths.length ? `isolation width ${range(widths)} m/z` : 'isolation width not stated in the file';
}

function stageSentence(level: number, spectra: readonly FrozenSpectrum[]): string {
  const own = spectra.filter((s) => s.level === level);
  const activation = list(unique(own.flatMap((s) => s.activations))) || 'activation not stated';
  const scans = own.reduce((sum, s) => sum + s.scanCount, 0);
  const analyser = list(unique(own.map((s) => ANALYSERS[s.analyser])));
  return `MS${level}: ${activation}, ${energyText(own)}, ${isolationText(own)}, ${analyser}, ${count(own.length, 'spectrum').replace('spectrums', 'spectra')} merged from ${count(scans, 'scan')}.`;
}

function acquisition({ run, tree, spectra }: RevisionContent): string {
  const source = run.ionSource && run.ionSource !== 'unknown' ? run.ionSource : 'ion source not stated';
  const levels = unique(spectra.map((s) => s.level)).sort((a, b) => a - b);
  return [
    `Spectra were recorded on ${run.instrument ?? 'an instrument that the file does not name'} (${source}, ${tree.polarity} mode).`,
    ...levels.map((level) => stageSentence(level, spectra)),
    `Run file: ${run.fileName} (SHA-256 ${run.sha256}).`
  ].join(' ');
}

function windows({ settings, spectra }: RevisionContent): string {
  const { tolerance } = settings;
  if (tolerance) return `${tolerance.ppm} ppm, at least ${tolerance.mda} mDa`;
  const texts = spectra.map(
    (s) => `${s.tolerance.ppm} ppm, at least ${s.tolerance.mda} mDa (${ANALYSERS[s.analyser]})`
  );
  return list(unique(texts));
}

function assignment(content: RevisionContent): string {
  const { tree, settings, ions } = content;
  const confirmed = ions.filter((ion) => ion.state === 'confirmed' && ion.formula !== null);
  const people = list(unique(confirmed.map((ion) => ion.decidedBy).filter((name) => name !== null)));
  const molecule = tree.formula
    ? `The molecular formula ${tree.formula} (${tree.adduct ?? 'ion type not stated'}) was ${tree.formulaFixed ? 'fixed by a person' : 'ranked first by the fragmentation tree under each candidate formula'}.`
    : 'No molecular formula was chosen.';
  return [
    'Scans that isolated the same ions were merged, and the stages were joined into a tree by scan references, precursor lists or isolated m/z, in that order.',
    `Formulas of product ions were sought among sub-formulas of their precursor ion within ${windows(content)}, elements ${settings.elements ?? 'by default'}; electrons were counted.`,
    molecule,
    `${count(confirmed.length, 'claim')} ${confirmed.length === 1 ? 'was' : 'were'} confirmed${people ? ` by ${people}` : ''}; claims and proposals together explain ${(tree.explained * 100).toFixed(1)} % of the product ion current.`,
    'A link is called measured where the ion was isolated and fragmented, inferred where the arithmetic alone allows it.'
  ].join(' ');
}

/** The methods paragraphs of a paper, filled from run and settings. What the file does not state is said to be so. */
export const methodsText = (content: RevisionContent): string[] => [acquisition(content), assignment(content)];
