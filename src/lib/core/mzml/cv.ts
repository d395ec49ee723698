/** Terms of the PSI-MS controlled vocabulary (release 4.1.257, HUPO-PSI/psi-ms-CV) that the reader understands. */
import type { AnalyserKind, SourceKind } from '../model';

export const CV = {
  msLevel: 'MS:1000511',
  ms1Spectrum: 'MS:1000579',
  msnSpectrum: 'MS:1000580',
  radiationSpectrum: 'MS:1000804',
  absorptionSpectrum: 'MS:1000806',
  emissionSpectrum: 'MS:1000805',
  positive: 'MS:1000130',
  negative: 'MS:1000129',
  centroid: 'MS:1000127',
  profile: 'MS:1000128',
  totalIonCurrent: 'MS:1000285',
  basePeakMz: 'MS:1000504',
  basePeakIntensity: 'MS:1000505',
  startTime: 'MS:1000016',
  minute: 'UO:0000031',
  oldMinute: 'MS:1000038',
  millisecond: 'UO:0000028',
  hour: 'UO:0000032',
  filterString: 'MS:1000512',
  isolationTarget: 'MS:1000827',
  isolationLower: 'MS:1000828',
  isolationUpper: 'MS:1000829',
  oldIsolationUpper: 'MS:1000793',
  oldIsolationLower: 'MS:1000794',
  selectedMz: 'MS:1000744',
  oldSelectedMz: 'MS:1000040',
  charge: 'MS:1000041',
  possibleCharge: 'MS:1000633',
  peakIntensity: 'MS:1000042',
  collisionEnergy: 'MS:1000045',
  normalizedEnergy: 'MS:1000138',
  activationEnergy: 'MS:1000509',
  electronvolt: 'UO:0000266',
  percent: 'UO:0000187',
  mzArray: 'MS:1000514',
  intensityArray: 'MS:1000515',
  instrumentModel: 'MS:1000031'
} as const;

/** Short names of the activation methods. */
export const ACTIVATIONS: ReadonlyMap<string, string> = new Map([
  ['MS:1000133', 'CID'],
  ['MS:1002472', 'CID'],
  ['MS:1000422', 'HCD'],
  ['MS:1002481', 'HCD'],
  ['MS:1000598', 'ETD'],
  ['MS:1000250', 'ECD'],
  ['MS:1002631', 'EThcD'],
  ['MS:1003182', 'ETciD'],
  ['MS:1000435', 'PD'],
  ['MS:1003246', 'UVPD'],
  ['MS:1000262', 'IRMPD'],
  ['MS:1000242', 'BIRD'],
  ['MS:1000282', 'SORI'],
  ['MS:1000599', 'PQD'],
  ['MS:1000136', 'SID'],
  ['MS:1003294', 'EAD'],
  ['MS:1003247', 'NETD'],
  ['MS:1000135', 'PSD'],
  ['MS:1001880', 'ISCID'],
  ['MS:1002678', 'supplemental HCD'],
  ['MS:1002679', 'supplemental CID']
]);

export const SOURCES: ReadonlyMap<string, SourceKind> = new Map([
  ['MS:1000073', 'ESI'],
  ['MS:1000398', 'ESI'],
  ['MS:1000397', 'ESI'],
  ['MS:1000070', 'APCI'],
  ['MS:1000382', 'APPI'],
  ['MS:1000075', 'MALDI'],
  ['MS:1000239', 'MALDI'],
  ['MS:1000389', 'EI'],
  ['MS:1000071', 'CI']
]);

export const ANALYSERS: ReadonlyMap<string, AnalyserKind> = new Map([
  ['MS:1000484', 'orbitrap'],
  ['MS:1000079', 'ft-icr'],
  ['MS:1000084', 'tof'],
  ['MS:1000081', 'quadrupole'],
  ['MS:1000264', 'ion-trap'],
  ['MS:1000082', 'ion-trap'],
  ['MS:1000291', 'ion-trap'],
  ['MS:1000083', 'ion-trap'],
  ['MS:1000078', 'ion-trap'],
  ['MS:1000080', 'sector']
]);

export type NumberType = 'f32' | 'f64' | 'i32' | 'i64';

export const NUMBER_TYPES: ReadonlyMap<string, NumberType> = new Map([
  ['MS:1000521', 'f32'],
  ['MS:1000523', 'f64'],
  ['MS:1000519', 'i32'],
  ['MS:1000522', 'i64']
]);

export interface Compression {
  numpress: 'linear' | 'pic' | 'slof' | null;
  zlib: boolean;
}

export const COMPRESSIONS: ReadonlyMap<string, Compression> = new Map([
  ['MS:1000576', { numpress: null, zlib: false }],
  ['MS:1000574', { numpress: null, zlib: true }],
  ['MS:1002312', { numpress: 'linear', zlib: false }],
  ['MS:1002313', { numpress: 'pic', zlib: false }],
  ['MS:1002314', { numpress: 'slof', zlib: false }],
  ['MS:1002746', { numpress: 'linear', zlib: true }],
  ['MS:1002747', { numpress: 'pic', zlib: true }],
  ['MS:1002748', { numpress: 'slof', zlib: true }]
]);

/** Compression terms of the vocabulary that cannot be read: truncation with prediction, and the zstd family. */
export const UNSUPPORTED_COMPRESSIONS: ReadonlySet<string> = new Set([
  'MS:1003088',
  'MS:1003089',
  'MS:1003090',
  'MS:1003780',
  'MS:1003781',
  'MS:1003782',
  'MS:1003783',
  'MS:1003784',
  'MS:1003785'
]);

const ALL = [
  ...Object.values(CV),
  ...[ACTIVATIONS, SOURCES, ANALYSERS, NUMBER_TYPES, COMPRESSIONS].flatMap((terms) => [...terms.keys()])
];

/** The accessions above, each by itself: one text for all its occurrences. */
export const KNOWN_ACCESSIONS: ReadonlyMap<string, string> = new Map(ALL.map((term) => [term, term]));
