/**
 * Ions that come from solvents, plastics and MALDI matrices rather than from the sample.
 * Names after the survey of interferences in Anal. Chim. Acta 627, 71 (2008); compositions are of the ion.
 */
export interface BackgroundIon {
  name: string;
  /** ion composition in Hill order. */
  formula: string;
  /** signed charge number. */
  charge: number;
}

type Row = readonly [name: string, formula: string, charge: number];

// prettier-ignore
const SOLVENT_ROWS: readonly Row[] = [
  ['acetonitrile H+', 'C2H4N', 1],
  ['2 acetonitrile H+', 'C4H7N2', 1],
  ['2 ACN Na+', 'C4H6N2Na', 1],
  ['methanol dimer H+', 'C2H9O2', 1],
  ['DMF H+', 'C3H8NO', 1],
  ['DMSO H+', 'C2H7OS', 1],
  ['2 DMSO H+', 'C4H13O2S2', 1],
  ['triethylamine H+', 'C6H16N', 1],
  ['tributylamine H+', 'C12H28N', 1],
  ['N-butylbenzenesulfonamide H+', 'C10H16NO2S', 1],
  ['dibutyl phthalate H+', 'C16H23O4', 1],
  ['phthalic anhydride H+ (phthalate fragment)', 'C8H5O3', 1],
  ['bis(2-ethylhexyl)phthalate H+', 'C24H39O4', 1],
  ['same, Na+', 'C24H38NaO4', 1],
  ['dioctyl adipate H+', 'C22H43O4', 1],
  ['tributyl phosphate H+', 'C12H28O4P', 1],
  ['triphenyl phosphate H+', 'C18H16O4P', 1],
  ['triphenylphosphine oxide H+', 'C18H16OP', 1],
  ['erucamide H+', 'C22H44NO', 1],
  ['oleamide H+', 'C18H36NO', 1],
  ['PEG n=6 H+', 'C12H27O7', 1],
  ['PEG n=8 H+', 'C16H35O9', 1],
  ['PEG n=8 Na+', 'C16H34NaO9', 1],
  ['cyclo-D3 H+ (siloxane)', 'C6H19O3Si3', 1],
  ['cyclo-D4 H+', 'C8H25O4Si4', 1],
  ['cyclo-D5 H+', 'C10H31O5Si5', 1],
  ['cyclo-D6 H+', 'C12H37O6Si6', 1],
  ['cyclo-D6 H+ - CH4', 'C11H33O6Si6', 1],
  ['cyclo-D7 H+', 'C14H43O7Si7', 1],
  ['cyclo-D5 H+ - CH4', 'C9H27O5Si5', 1],
  ['sodium formate Na2(HCOO)+', 'CHNa2O2', 1],
  ['sodium acetate Na2(OAc)+', 'C2H3Na2O2', 1],
  ['sodium TFA Na2(TFA)+', 'C2F3Na2O2', 1],
  ['tris(di-tert-butylphenyl) phosphate H+', 'C42H64O4P', 1],
  ['octadecyl di-tert-butylhydroxyphenylpropionate NH4+', 'C35H66NO3', 1],
  ['bis(tetramethylpiperidyl) sebacate H+', 'C28H53N2O4', 1],
  ['formate', 'CHO2', -1],
  ['acetate', 'C2H3O2', -1],
  ['TFA-', 'C2F3O2', -1],
  ['2 TFA - H', 'C4HF6O4', -1],
  ['nitrate', 'NO3', -1],
  ['HSO4-', 'HO4S', -1],
  ['formic acid dimer -H', 'C2H3O4', -1],
  ['palmitate', 'C16H31O2', -1],
  ['stearate', 'C18H35O2', -1],
  ['oleate', 'C18H33O2', -1],
  ['linear dodecylbenzenesulfonate', 'C18H29O3S', -1],
  ['lauryl sulfate', 'C12H25O4S', -1],
  ['PFOA -H', 'C8F15O2', -1],
  ['iodide', 'I', -1]
];

// prettier-ignore
const MATRIX_ROWS: readonly Row[] = [
  ['DHB [M+H-H2O]+', 'C7H5O3', 1],
  ['DHB M+.', 'C7H6O4', 1],
  ['DHB [M+H]+', 'C7H7O4', 1],
  ['DHB [M+Na]+', 'C7H6NaO4', 1],
  ['DHB [M+K]+', 'C7H6KO4', 1],
  ['DHB [M-H+2Na]+', 'C7H5Na2O4', 1],
  ['DHB [2M+H-2H2O]+', 'C14H9O6', 1],
  ['DHB [2M+H-H2O]+', 'C14H11O7', 1],
  ['DHB [2M+Na]+', 'C14H12NaO8', 1],
  ['DHB [M-H]-', 'C7H5O4', -1],
  ['CHCA [M+H-CO2]+', 'C9H8NO', 1],
  ['CHCA [M+H-H2O]+', 'C10H6NO2', 1],
  ['CHCA [M+H]+', 'C10H8NO3', 1],
  ['CHCA [M+Na]+', 'C10H7NNaO3', 1],
  ['CHCA [M+K]+', 'C10H7KNO3', 1],
  ['CHCA [M-H+2Na]+', 'C10H6NNa2O3', 1],
  ['CHCA [2M+H-CO2]+', 'C19H15N2O4', 1],
  ['CHCA [2M+H]+', 'C20H15N2O6', 1],
  ['CHCA [2M+Na]+', 'C20H14N2NaO6', 1],
  ['CHCA [3M+H]+', 'C30H22N3O9', 1],
  ['CHCA [M-H-CO2]-', 'C9H6NO', -1],
  ['SA [M+H-H2O]+', 'C11H11O4', 1],
  ['SA [M+H]+', 'C11H13O5', 1],
  ['9-AA [M+H]+', 'C13H11N2', 1],
  ['9-AA [M-H]-', 'C13H9N2', -1]
];

const toIon = ([name, formula, charge]: Row): BackgroundIon => ({ name, formula, charge });

/** Ions of solvents, plasticisers, polymers and additives. */
export const BACKGROUND_IONS: readonly BackgroundIon[] = SOLVENT_ROWS.map(toIon);

/** Ions of the usual MALDI matrices (DHB, CHCA, sinapinic acid, 9-aminoacridine). */
export const MATRIX_IONS: readonly BackgroundIon[] = MATRIX_ROWS.map(toIon);
