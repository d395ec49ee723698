/** The parts of untyped npm packages that tests and benches compare with. */
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

declare module 'mf-finder' {
  export function findMFs(
    targetMass: number,
    options: {
      ranges: { mf: string; min: number; max: number }[];
      precision: number;
      allowNeutral: boolean;
      limit: number;
      maxIterations: number;
      filter: { unsaturation?: { min: number; onlyInteger: boolean } };
    }
  ): Promise<{ mfs: unknown[] }>;
}
