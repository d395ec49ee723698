import { findMFs } from 'mf-finder';
import type { ElementRanges } from '../../src/lib/core/model';

/** Neutral masses, u. */
export const MASSES = [
  150.0681, 194.080376, 237.1365, 302.042653, 349.109627, 400.2, 452.2787, 515.2557, 608.2741, 663.4134, 808.4921,
  1011.5466
];
export const CHNOPS: ElementRanges = { C: [0, 100], H: [0, 200], N: [0, 20], O: [0, 30], P: [0, 4], S: [0, 4] };
export const WITH_HALOGENS: ElementRanges = { ...CHNOPS, F: [0, 6], Cl: [0, 4], Br: [0, 2] };
/** Beyond this mass the general package takes seconds with halogens. */
export const HALOGENS_UP_TO = 664;

/** Element ranges as the general package wants them. */
const asRanges = (ranges: ElementRanges) => Object.entries(ranges).map(([mf, [min, max]]) => ({ mf, min, max }));

/** Formulas of a mass by the general package. @param molecules only closed-shell molecules: RDBE whole and from 0 on */
export async function general(mass: number, ppm: number, ranges: ElementRanges, molecules: boolean): Promise<number> {
  const filter = molecules ? { unsaturation: { min: 0, onlyInteger: true } } : {};
  const { mfs } = await findMFs(mass, {
    ...{ ranges: asRanges(ranges), precision: ppm, allowNeutral: true, limit: 1e7, maxIterations: 1e10, filter }
  });
  return mfs.length;
}
