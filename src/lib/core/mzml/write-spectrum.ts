/** The XML of one spectrum up to its arrays, as the writer needs it. */
import type { PrecursorRecord, Scan } from '../model';
import { CV } from './cv';
import { ACTIVATION_TERMS, cvParam, escapeXml, UNITS, userParam } from './write-terms';

/** A scan to write: what the reader hands out, with the rest optional. */
export type ScanToWrite = Pick<Scan, 'id' | 'level' | 'polarity' | 'peaks'> &
  Partial<Pick<Scan, 'time' | 'centroided' | 'precursors' | 'filterString' | 'analyser'>> & {
    /** free facts, written as userParams of the spectrum. */
    remarks?: Readonly<Record<string, string>>;
  };

function precursorXml(record: PrecursorRecord): string {
  const { isolation, selectedMz, charge, intensity, activations, energy } = record;
  const window = isolation
    ? [
        cvParam(CV.isolationTarget, 'isolation window target m/z', isolation.target, UNITS.mz),
        isolation.lower === null
          ? ''
          : cvParam(CV.isolationLower, 'isolation window lower offset', isolation.lower, UNITS.mz),
        isolation.upper === null
          ? ''
          : cvParam(CV.isolationUpper, 'isolation window upper offset', isolation.upper, UNITS.mz),
        record.level === null ? '' : userParam('ms level', String(record.level))
      ]
    : [];
  const ion = [
    selectedMz === null ? '' : cvParam(CV.selectedMz, 'selected ion m/z', selectedMz, UNITS.mz),
    charge === null ? '' : cvParam(CV.charge, 'charge state', charge),
    intensity === null ? '' : cvParam(CV.peakIntensity, 'peak intensity', intensity, UNITS.counts)
  ];
  const activation = activations.map((name) => ACTIVATION_TERMS[name] ?? ACTIVATION_TERMS.unknown);
  if (energy !== null) {
    const normalized = record.energyUnit === '%';
    activation.push(
      normalized
        ? cvParam(CV.normalizedEnergy, 'normalized collision energy', energy, UNITS.percent)
        : cvParam(CV.collisionEnergy, 'collision energy', energy, record.energyUnit === 'eV' ? UNITS.electronvolt : '')
    );
  }
  const reference = record.spectrumRef === null ? '' : ` spectrumRef="${escapeXml(record.spectrumRef)}"`;
  return [
    `<precursor${reference}>`,
    ...(isolation ? ['<isolationWindow>', ...window, '</isolationWindow>'] : []),
    ...(ion.some(Boolean)
      ? ['<selectedIonList count="1">', '<selectedIon>', ...ion, '</selectedIon>', '</selectedIonList>']
      : []),
    '<activation>',
    ...activation,
    '</activation>',
    '</precursor>'
  ]
    .filter(Boolean)
    .join('\n');
}

function summaryParams(scan: ScanToWrite): string[] {
  const { mz, intensity } = scan.peaks;
  if (mz.length === 0) return [];
  let top = 0;
  let sum = 0;
  intensity.forEach((value, i) => {
    sum += value;
    if (value > intensity[top]) top = i;
  });
  return [
    cvParam(CV.basePeakMz, 'base peak m/z', mz[top], UNITS.mz),
    cvParam(CV.basePeakIntensity, 'base peak intensity', intensity[top], UNITS.counts),
    cvParam(CV.totalIonCurrent, 'total ion current', sum),
    cvParam('MS:1000528', 'lowest observed m/z', mz[0], UNITS.mz),
    cvParam('MS:1000527', 'highest observed m/z', mz[mz.length - 1], UNITS.mz)
  ];
}

function scanXml(scan: ScanToWrite, configuration: string): string {
  return [
    '<scanList count="1">',
    cvParam('MS:1000795', 'no combination'),
    `<scan instrumentConfigurationRef="${configuration}">`,
    ...(typeof scan.time === 'number' ? [cvParam(CV.startTime, 'scan start time', scan.time, UNITS.second)] : []),
    ...(scan.filterString ? [cvParam(CV.filterString, 'filter string', scan.filterString)] : []),
    '</scan>',
    '</scanList>'
  ].join('\n');
}

/** Start tag and everything before the first array. */
export function spectrumHead(scan: ScanToWrite, index: number, configuration: string): string {
  const precursors = scan.precursors ?? [];
  return [
    `<spectrum index="${index}" id="${escapeXml(scan.id)}" defaultArrayLength="${scan.peaks.mz.length}">`,
    scan.level === 1 ? cvParam(CV.ms1Spectrum, 'MS1 spectrum') : cvParam(CV.msnSpectrum, 'MSn spectrum'),
    cvParam(CV.msLevel, 'ms level', scan.level),
    ...(scan.polarity === 'positive' ? [cvParam(CV.positive, 'positive scan')] : []),
    ...(scan.polarity === 'negative' ? [cvParam(CV.negative, 'negative scan')] : []),
    scan.centroided === false ? cvParam(CV.profile, 'profile spectrum') : cvParam(CV.centroid, 'centroid spectrum'),
    ...summaryParams(scan),
    ...Object.entries(scan.remarks ?? {}).map(([name, value]) => userParam(name, value)),
    scanXml(scan, configuration),
    ...(precursors.length === 0
      ? []
      : [`<precursorList count="${precursors.length}">`, ...precursors.map(precursorXml), '</precursorList>']),
    '<binaryDataArrayList count="2">',
    ''
  ].join('\n');
}
