/** The parts of two untyped npm packages that the reference tests compare with. */
declare module 'mf-parser' {
  export class MF {
    constructor(formula: string);
    getInfo(): { monoisotopicMass: number };
  }
}

declare module 'isotopic-distribution' {
  export class IsotopicDistribution {
    constructor(formula: string, options: { fwhm: number });
    getDistribution(): { array: { x: number; y: number }[] };
  }
}
