import { describe, expect, it } from 'vitest';
import { formatFormula, ionMz, isRadical, parseFormula, subtract } from '../../src/lib/core/chem';
import { type AssembledTree } from '../../src/lib/core/model';
import { defaultSuggestOptions, suggest } from '../../src/lib/core/suggest';
import { spectrum, treeOf } from '../helpers/assembled-trees';
import { PATHWAYS, type Pathway, type PathwayIon } from './pathway-data';

/**
 * The ions of one pathway come from several laboratories; in one run errors beyond 7 ppm beside others below 1 ppm do
 * not occur, so the three such records give their calculated m/z.
 */
const MIXED_ERROR_PPM = 7;

const placed = ({ adduct, ions, ...rest }: Pathway): Pathway => ({
  ...rest,
  adduct,
  ions: ions.map((ion): PathwayIon => {
    const calculated = ionMz(parseFormula(ion.formula), adduct.endsWith('-') ? -1 : 1);
    return Math.abs(ion.mz / calculated - 1) * 1e6 > MIXED_ERROR_PPM ? { ...ion, mz: calculated } : ion;
  })
});

const treeFor = ({ adduct, ions }: Pathway): AssembledTree =>
  treeOf(adduct.endsWith('-') ? 'negative' : 'positive', [
    spectrum({ path: [ions[0].mz], analyser: 'tof', peaks: ions.map((ion) => [ion.mz, ion.relative]) })
  ]);

describe('pathways of one spectrum, accurate mass', () => {
  it.each(PATHWAYS)('$title: every listed ion formula', (listed) => {
    const pathway = placed(listed);
    const options = { ...defaultSuggestOptions(), formula: pathway.formula, adducts: [pathway.adduct] };
    const [ions] = suggest(treeFor(pathway), options).spectra;
    for (const wanted of pathway.ions) {
      const found = ions.find((ion) => ion.mz === wanted.mz);
      expect(found?.formula, `${wanted.record} m/z ${wanted.mz}`).toBe(wanted.formula);
      // only one of several possible origins is shown; it must be consistent with its loss
      if (found?.fromFormula && found.loss && found.formula) {
        expect(formatFormula(subtract(parseFormula(found.fromFormula), parseFormula(found.formula)))).toBe(found.loss);
        expect(found.lossRadical).toBe(isRadical(parseFormula(found.loss)));
      }
    }
  });

  it.each(PATHWAYS)(
    '$title: the listed loss when its precursor ion alone was isolated',
    ({ adduct, formula, ions }) => {
      for (const { from, loss, mz, relative } of ions) {
        const origin = ions.find((ion) => ion.formula === from);
        if (!origin) continue;
        const stages =
          origin === ions[0]
            ? [spectrum({ path: [origin.mz], analyser: 'tof', peaks: [[mz, relative]] })]
            : [
                spectrum({ path: [ions[0].mz], analyser: 'tof', peaks: [[origin.mz, origin.relative]] }),
                spectrum({ path: [ions[0].mz, origin.mz], analyser: 'tof', peaks: [[mz, relative]] })
              ];
        const tree = treeOf(adduct.endsWith('-') ? 'negative' : 'positive', stages);
        const found = suggest(tree, { ...defaultSuggestOptions(), formula, adducts: [adduct] }).spectra.at(-1)?.[0];
        expect(found).toMatchObject({ fromFormula: from, loss, link: 'measured' });
      }
    }
  );
});
