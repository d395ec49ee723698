import type { Compound, DemoRun, ProductIon } from './scheme';

// The molecules are invented. Their product ions follow from losses that the open literature lists (see core/chem/losses).

const ions = (...rows: [formula: string, percent: number, best?: number][]): ProductIon[] =>
  rows.map(([formula, percent, best]) => ({ formula, percent, best }));

const CID = 'CID' as const;

/** An ester with a basic nitrogen: the acid goes first, then water, ammonia and methanol. */
const alkaloidEster: Compound = {
  formula: 'C19H24N2O5',
  adduct: '[M+H]+',
  apex: 94,
  width: 11,
  height: 3.2e7,
  stages: [
    {
      path: [],
      activation: CID,
      energies: [25, 35, 45],
      yield: 0.32,
      left: 14,
      products: ions(
        ['C17H21N2O3', 100, 35],
        ['C19H23N2O4', 38, 22],
        ['C17H19N2O2', 34, 45],
        ['C8H14NO', 27, 42],
        ['C17H18NO3', 21, 44],
        ['C9H9O2', 16, 50],
        ['C16H21N2O2', 9, 40],
        ['C19H22NO5', 7, 24],
        ['C17H23N2O4', 6, 28],
        ['C9H11O2', 5, 35]
      ),
      // An oxygen-rich neighbour of nearly the same m/z passes the same window.
      coIsolated: ions(['C10H11O3', 6], ['C20H23O5', 3]),
      stray: [{ mz: 197.9023, percent: 7 }]
    },
    {
      path: ['C17H21N2O3'],
      activation: CID,
      energies: [30, 40],
      yield: 0.12,
      left: 9,
      products: ions(
        ['C17H18NO3', 100, 36],
        ['C17H19N2O2', 62, 34],
        ['C8H14NO', 44, 38],
        ['C9H9O2', 29, 45],
        ['C16H17N2O2', 18, 38],
        ['C8H12N', 17, 45],
        ['C16H21N2O2', 13, 32],
        ['C8H9O', 8, 48]
      )
    },
    {
      path: ['C19H23N2O4'],
      activation: CID,
      energies: [30],
      yield: 0.06,
      left: 11,
      products: ions(['C17H19N2O2', 100], ['C17H16NO2', 28], ['C17H21N2O3', 17], ['C9H9O2', 12], ['C18H23N2O3', 9])
    },
    {
      path: ['C17H21N2O3', 'C17H18NO3'],
      activation: CID,
      energies: [35],
      yield: 0.04,
      left: 8,
      products: ions(
        ['C17H16NO2', 100],
        ['C9H9O2', 52],
        ['C16H18NO2', 37],
        ['C16H14NO2', 31],
        ['C8H9O', 14],
        ['C16H16NO', 9]
      )
    },
    {
      path: ['C17H21N2O3', 'C17H19N2O2'],
      activation: CID,
      energies: [35],
      yield: 0.03,
      left: 10,
      products: ions(['C17H16NO2', 100], ['C8H12N', 58], ['C16H15N2O', 26], ['C16H19N2O', 19], ['C9H9O2', 13])
    },
    {
      path: ['C17H21N2O3', 'C8H14NO'],
      activation: CID,
      energies: [35],
      yield: 0.03,
      left: 12,
      products: ions(['C8H12N', 100], ['C7H14N', 28], ['C8H11O', 22], ['C5H8N', 18], ['C6H10N', 9])
    }
  ]
};

/** What is isolated together with the ester: the same nominal mass, eleven millimass units lower. */
const neighbour: Compound = {
  ...{ formula: 'C20H24O6', adduct: '[M+H]+' },
  apex: 97,
  width: 14,
  height: 1.5e6,
  stages: []
};

/** A later peak of the same extract, fragmented once: there to be chosen, no tree is built from it in the demo. */
const deacetylated: Compound = {
  formula: 'C17H22N2O4',
  adduct: '[M+H]+',
  apex: 148,
  width: 9,
  height: 9e6,
  stages: [
    {
      path: [],
      activation: CID,
      energies: [35],
      yield: 0.3,
      left: 18,
      products: ions(['C17H21N2O3', 100], ['C17H19N2O2', 46], ['C17H18NO3', 30], ['C8H14NO', 25], ['C9H9O2', 18])
    }
  ]
};

/** A hexoside of a hydroxyphenyl acid: the sugar goes first, then carbon dioxide or a methyl radical. */
const glycoside: Compound = {
  formula: 'C18H24O9',
  adduct: '[M-H]-',
  apex: 71,
  width: 8,
  height: 1.4e7,
  stages: [
    {
      path: [],
      activation: CID,
      energies: [20, 30],
      yield: 0.4,
      left: 12,
      products: ions(
        ['C12H13O4', 100, 26],
        ['C12H11O3', 24, 32],
        ['C14H15O5', 19, 24],
        ['C18H21O8', 9, 20],
        ['C15H17O6', 8, 22],
        ['C6H11O6', 6, 24],
        ['C11H13O2', 5, 34]
      )
    },
    {
      path: ['C12H13O4'],
      activation: CID,
      energies: [30, 38],
      yield: 0.16,
      left: 10,
      products: ions(
        ['C11H13O2', 100, 34],
        ['C11H10O4', 58, 32],
        ['C12H11O3', 21, 28],
        ['C10H9O2', 14, 38],
        ['C10H10O2', 11, 40]
      )
    },
    {
      path: ['C12H13O4', 'C11H13O2'],
      activation: CID,
      energies: [38],
      yield: 0.05,
      left: 14,
      products: ions(['C10H10O2', 100], ['C8H7O2', 24], ['C9H9O2', 13], ['C9H9O', 8])
    }
  ]
};

/** A chlorinated base: dimethylamine and hydrogen chloride go; chlorine shows in the isotope pattern. */
const chlorinated: Compound = {
  formula: 'C16H18ClN3O',
  adduct: '[M+H]+',
  apex: 52,
  width: 6,
  height: 2.1e6,
  stages: [
    {
      path: [],
      activation: CID,
      energies: [10, 20, 40],
      yield: 0.6,
      left: 22,
      products: ions(
        ['C14H12ClN2O', 100, 20],
        ['C13H12ClN2', 42, 34],
        ['C4H10N', 38, 30],
        ['C7H4ClO', 33, 40],
        ['C14H11N2O', 21, 36],
        ['C16H16ClN2O', 15, 10],
        ['C16H18N3O', 8, 18],
        ['C13H11N2', 7, 42]
      ),
      stray: [{ mz: 176.8714, percent: 12 }]
    }
  ]
};

const orbitrap = {
  analyser: 'orbitrap',
  instrument: 'ion trap with orbitrap detection',
  isolation: 0.5,
  shift: 0.7,
  scatter: 1.1,
  range: [50, 800]
} as const;

/** The runs of the demo. */
export const SHORE_RUNS: readonly DemoRun[] = [
  {
    ...orbitrap,
    fileName: 'SE-014_pos_MSn.mzML',
    id: 'SE-014_pos_MSn',
    seed: 14,
    sample: 'SE-014',
    startTime: '2026-03-03T09:12:00Z',
    ionSource: 'ESI',
    polarity: 'positive',
    energyUnit: '%',
    length: 180,
    compounds: [alkaloidEster, neighbour, deacetylated]
  },
  {
    ...orbitrap,
    fileName: 'SE-022_neg_MSn.mzML',
    id: 'SE-022_neg_MSn',
    seed: 22,
    sample: 'SE-022',
    startTime: '2026-03-03T10:41:00Z',
    ionSource: 'ESI',
    polarity: 'negative',
    energyUnit: '%',
    length: 130,
    compounds: [glycoside]
  },
  {
    fileName: 'SE-031_APCI_MS2.mzML',
    id: 'SE-031_APCI_MS2',
    seed: 31,
    sample: 'SE-031',
    startTime: '2026-03-05T14:05:00Z',
    ionSource: 'APCI',
    analyser: 'tof',
    instrument: 'quadrupole with time-of-flight detection',
    polarity: 'positive',
    energyUnit: 'eV',
    isolation: 0.65,
    length: 100,
    shift: -1.2,
    scatter: 2.2,
    range: [50, 600],
    compounds: [chlorinated]
  }
];
