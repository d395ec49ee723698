/**
 * Worked fragmentation pathways: formulas and losses are standard literature assignments; found m/z are those of open
 * MassBank records (accession beside each ion), measured by different laboratories on different instruments.
 */
export interface PathwayIon {
  formula: string;
  /** formula of the ion it comes from; null for the precursor ion. */
  from: string | null;
  loss: string | null;
  /** found m/z. */
  mz: number;
  /** per cent of the base peak of its record. */
  relative: number;
  record: string;
}

export interface Pathway {
  title: string;
  formula: string;
  adduct: string;
  ions: readonly PathwayIon[];
}

type Row = readonly [
  formula: string,
  from: string | null,
  loss: string | null,
  mz: number,
  relative: number,
  record: string
];

const pathway = (title: string, formula: string, adduct: string, rows: readonly Row[]): Pathway => ({
  title,
  formula,
  adduct,
  ions: rows.map(([ion, from, loss, mz, relative, record]) => ({ formula: ion, from, loss, mz, relative, record }))
});

// prettier-ignore
export const PATHWAYS: readonly Pathway[] = [
  pathway('Caffeine [M+H]+', 'C8H10N4O2', '[M+H]+', [
    ['C8H11N4O2', null, null, 195.0877, 100.0, 'MSBNK-Eawag-EA030309'],
    ['C6H8N3O', 'C8H11N4O2', 'C2H3NO', 138.0662, 100.0, 'MSBNK-Eawag-EA030301'],
    ['C5H8N3', 'C6H8N3O', 'CO', 110.0713, 79.0, 'MSBNK-LCSB-LU119906'],
    ['C4H7N2', 'C5H8N3', 'CHN', 83.0604, 100.0, 'MSBNK-LCSB-LU119906'],
    ['C3H5N2', 'C5H8N3', 'C2H3N', 69.0447, 84.4, 'MSBNK-LCSB-LU119906'],
    ['C3H6N', 'C4H7N2', 'CHN', 56.0495, 39.5, 'MSBNK-LCSB-LU119906'],
    ['C5H5N3O', 'C6H8N3O', 'CH3', 123.043, 100.0, 'MSBNK-BAFG-CSL2311094671']
  ]),
  pathway('Reserpine [M+H]+', 'C33H40N2O9', '[M+H]+', [
    ['C33H41N2O9', null, null, 609.2807, 100.0, 'MSBNK-Eawag-EA268202'],
    ['C32H37N2O8', 'C33H41N2O9', 'CH4O', 577.253601, 26.7, 'MSBNK-MPI_for_Chemical_Ecology-CE000150'],
    ['C23H30NO8', 'C33H41N2O9', 'C10H11NO', 448.1966, 100.0, 'MSBNK-Eawag-EA268201'],
    ['C22H30NO8', 'C33H41N2O9', 'C11H11NO', 436.1965, 18.3, 'MSBNK-Eawag-EA268201'],
    ['C23H29N2O4', 'C33H41N2O9', 'C10H12O5', 397.2139, 100.0, 'MSBNK-NaToxAq-NA002312'],
    ['C22H25N2O3', 'C23H29N2O4', 'CH4O', 365.1831, 25.3, 'MSBNK-Univ_Connecticut-CO000389'],
    ['C13H18NO3', 'C23H30NO8', 'C10H12O5', 236.1269, 16.9, 'MSBNK-BAFG-CSL23111010120'],
    ['C10H11O4', 'C33H41N2O9', 'C23H30N2O5', 195.0652, 100.0, 'MSBNK-Eawag-EA268203'],
    ['C11H12NO', 'C33H41N2O9', 'C22H29NO8', 174.0913, 100.0, 'MSBNK-Eawag-EA268205']
  ]),
  pathway('Cocaine [M+H]+', 'C17H21NO4', '[M+H]+', [
    ['C17H22NO4', null, null, 304.1543, 100.0, 'MSBNK-Eawag-EA281703'],
    ['C10H16NO2', 'C17H22NO4', 'C7H6O2', 182.1176, 100.0, 'MSBNK-Eawag-EA281705'],
    ['C9H12NO', 'C10H16NO2', 'CH4O', 150.0909, 29.6, 'MSBNK-BAFG-CSL23111017579'],
    ['C8H12N', 'C9H12NO', 'CO', 122.0965, 19.8, 'MSBNK-Eawag-EA281706'],
    ['C5H8N', 'C9H12NO', 'C4H4O', 82.0651, 100.0, 'MSBNK-BAFG-CSL23111017583'],
    ['C7H10N', 'C9H12NO', 'C2H2O', 108.0805, 20.9, 'MSBNK-BAFG-CSL23111017571'],
    ['C16H18NO3', 'C17H22NO4', 'CH4O', 272.1274, 1.4, 'MSBNK-Athens_Univ-AU161902'],
    ['C7H5O', 'C17H22NO4', 'C10H17NO3', 105.0335, 100.0, 'MSBNK-Eawag-EA281707'],
    ['C6H5', 'C7H5O', 'CO', 77.0386, 100.0, 'MSBNK-BAFG-CSL23111017577']
  ]),
  pathway('Erythromycin A [M+H]+', 'C37H67NO13', '[M+H]+', [
    ['C37H68NO13', null, null, 734.4682, 100.0, 'MSBNK-Eawag-EA018902'],
    ['C37H66NO12', 'C37H68NO13', 'H2O', 716.4577, 14.9, 'MSBNK-Eawag-EA018914'],
    ['C29H52NO9', 'C37H66NO12', 'C8H14O3', 558.3668, 25.5, 'MSBNK-Athens_Univ-AU105408'],
    ['C29H54NO10', 'C37H68NO13', 'C8H14O3', 576.3738, 100.0, 'MSBNK-Eawag-EA018914'],
    ['C29H50NO8', 'C29H52NO9', 'H2O', 540.349, 10.2, 'MSBNK-IPB_Halle-PB005803'],
    ['C8H16NO2', 'C37H68NO13', 'C29H52O11', 158.1176, 100.0, 'MSBNK-Athens_Univ-AU105404'],
    ['C6H14NO', 'C8H16NO2', 'C2H2O', 116.1068, 30.4, 'MSBNK-BAFG-CSL2311108086'],
    ['C5H7O', 'C8H16NO2', 'C3H9NO', 83.0491, 100.0, 'MSBNK-Eawag-EA018904']
  ]),
  pathway('Ampicillin [M+H]+', 'C16H19N3O4S', '[M+H]+', [
    ['C16H20N3O4S', null, null, 350.1159, 100.0, 'MSBNK-BAFG-CSL2311094805'],
    ['C16H17N2O4S', 'C16H20N3O4S', 'H3N', 333.0901, 11.9, 'MSBNK-BAFG-CSL2311094814'],
    ['C7H8N', 'C16H20N3O4S', 'C9H12N2O4S', 106.0651, 100.0, 'MSBNK-BAFG-CSL2311094802'],
    ['C6H10NO2S', 'C16H20N3O4S', 'C10H10N2O2', 160.0428, 44.3, 'MSBNK-Eawag-EQ366101'],
    ['C5H8NS', 'C6H10NO2S', 'CH2O2', 114.0374, 27.3, 'MSBNK-Univ_Connecticut-CO000054'],
    ['C10H10NOS', 'C16H20N3O4S', 'C6H10N2O3', 192.0476, 57.5, 'MSBNK-BAFG-CSL2311094814'],
    ['C10H8NO2', 'C16H20N3O4S', 'C6H12N2O2S', 174.0548, 41.8, 'MSBNK-BAFG-CSL2311094814']
  ]),
  pathway('Sulfamethoxazole [M+H]+', 'C10H11N3O3S', '[M+H]+', [
    ['C10H12N3O3S', null, null, 254.0594, 100.0, 'MSBNK-HBM4EU-HB001601'],
    ['C6H6NO2S', 'C10H12N3O3S', 'C4H6N2O', 156.0114, 100.0, 'MSBNK-Eawag-EA029810'],
    ['C6H6NO', 'C6H6NO2S', 'OS', 108.0444, 100.0, 'MSBNK-Eawag-EA029805'],
    ['C6H6N', 'C6H6NO2S', 'O2S', 92.0495, 100.0, 'MSBNK-Eawag-EA029807'],
    ['C5H5', 'C6H6N', 'CHN', 65.0385, 100.0, 'MSBNK-HBM4EU-HB002607'],
    ['C4H7N2O', 'C10H12N3O3S', 'C6H5NO2S', 99.0553, 29.6, 'MSBNK-HBM4EU-HB001613'],
    ['C10H10N3O', 'C10H12N3O3S', 'H2O2S', 188.082, 100.0, 'MSBNK-HBM4EU-HB001614']
  ]),
  pathway('Quercetin [M-H]-', 'C15H10O7', '[M-H]-', [
    ['C15H9O7', null, null, 301.0354, 100.0, 'MSBNK-LCSB-LU029851'],
    ['C8H3O5', 'C15H9O7', 'C7H6O2', 178.9986, 55.4, 'MSBNK-LCSB-LU029852'],
    ['C7H3O4', 'C8H3O5', 'CO', 151.0036, 100.0, 'MSBNK-BS-BS003398'],
    ['C6H3O2', 'C7H3O4', 'CO2', 107.0139, 100.0, 'MSBNK-LCSB-LU029854'],
    ['C4HO', 'C6H3O2', 'C2H2O', 65.0033, 100.0, 'MSBNK-LCSB-LU029855'],
    ['C7H5O2', 'C15H9O7', 'C8H4O5', 121.0294, 100.0, 'MSBNK-BAFG-CSL2311091867'],
    ['C14H9O6', 'C15H9O7', 'CO', 273.0402, 17.0, 'MSBNK-Washington_State_Univ-BML00143'],
    ['C13H9O5', 'C14H9O6', 'CO', 245.045, 7.9, 'MSBNK-Fiocruz-FIO00280']
  ]),
  pathway('Quercetin [M+H]+', 'C15H10O7', '[M+H]+', [
    ['C15H11O7', null, null, 303.049866, 100.0, 'MSBNK-MPI_for_Chemical_Ecology-CE000168'],
    ['C15H9O6', 'C15H11O7', 'H2O', 285.039246, 48.3, 'MSBNK-MPI_for_Chemical_Ecology-CE000170'],
    ['C14H9O5', 'C15H9O6', 'CO', 257.044373, 99.9, 'MSBNK-MPI_for_Chemical_Ecology-CE000170'],
    ['C13H9O4', 'C14H9O5', 'CO', 229.04956, 100.0, 'MSBNK-RIKEN-PR302832'],
    ['C7H5O4', 'C15H11O7', 'C8H6O3', 153.0184, 100.0, 'MSBNK-Fiocruz-FIO00275'],
    ['C8H5O4', 'C15H11O7', 'C7H6O3', 165.018051, 57.2, 'MSBNK-MPI_for_Chemical_Ecology-CE000170'],
    ['C7H5O3', 'C8H5O4', 'CO', 137.02353, 75.6, 'MSBNK-RIKEN-PR302852'],
    ['C8H5O3', 'C15H11O7', 'C7H6O4', 149.023071, 7.1, 'MSBNK-MPI_for_Chemical_Ecology-CE000170']
  ]),
  pathway('Chloramphenicol [M-H]-', 'C11H12Cl2N2O5', '[M-H]-', [
    ['C11H11Cl2N2O5', null, null, 321.0051, 100.0, 'MSBNK-Eawag-EQ307051'],
    ['C10H10ClN2O4', 'C11H11Cl2N2O5', 'CHClO', 257.0333, 100.0, 'MSBNK-UFZ-UF407353'],
    ['C11H9N2O5', 'C11H11Cl2N2O5', 'Cl2H2', 249.0514, 14.4, 'MSBNK-UFZ-UF407354'],
    ['C9H8NO4', 'C11H11Cl2N2O5', 'C2H3Cl2NO', 194.0447, 74.8, 'MSBNK-Washington_State_Univ-BML00987'],
    ['C7H6NO3', 'C11H11Cl2N2O5', 'C4H5Cl2NO2', 152.0353, 100.0, 'MSBNK-CASMI_2016-SM831851'],
    ['C7H5NO3', 'C7H6NO3', 'H', 151.02719, 100.0, 'MSBNK-ACES_SU-AS000039'],
    ['C7H5O2', 'C7H5NO3', 'NO', 121.0295, 100.0, 'MSBNK-LCSB-LU066253']
  ]),
  pathway('Rutin [M-H]-', 'C27H30O16', '[M-H]-', [
    ['C27H29O16', null, null, 609.1463, 100.0, 'MSBNK-Fiocruz-FIO00593'],
    ['C15H9O7', 'C27H29O16', 'C12H20O9', 301.0343, 56.4, 'MSBNK-Fiocruz-FIO00596'],
    ['C15H8O7', 'C27H29O16', 'C12H21O9', 300.0275, 100.0, 'MSBNK-Fiocruz-FIO00597'],
    ['C14H7O6', 'C15H8O7', 'CHO', 271.0247, 4.9, 'MSBNK-Fiocruz-FIO00597']
  ]),
  pathway('Rutin [M+H]+', 'C27H30O16', '[M+H]+', [
    ['C27H31O16', null, null, 611.1593, 100.0, 'MSBNK-Fiocruz-FIO00588'],
    ['C21H21O12', 'C27H31O16', 'C6H10O4', 465.102, 58.8, 'MSBNK-IPB_Halle-PB001341'],
    ['C15H11O7', 'C21H21O12', 'C6H10O5', 303.0499, 100.0, 'MSBNK-Fiocruz-FIO00589']
  ]),
  pathway('Verapamil [M+H]+', 'C27H38N2O4', '[M+H]+', [
    ['C27H39N2O4', null, null, 455.2904, 100.0, 'MSBNK-UFZ-WANA004003B085PH'],
    ['C18H27N2O2', 'C27H39N2O4', 'C9H12O2', 303.207, 100.0, 'MSBNK-Eawag-EA067401'],
    ['C16H22NO2', 'C18H27N2O2', 'C2H5N', 260.1641, 21.6, 'MSBNK-BAFG-CSL2311096272'],
    ['C10H13O2', 'C27H39N2O4', 'C17H26N2O2', 165.0911, 100.0, 'MSBNK-CASMI_2016-SM855703'],
    ['C9H10O2', 'C10H13O2', 'CH3', 150.0676, 100.0, 'MSBNK-Eawag-EA067406'],
    ['C8H7O2', 'C9H10O2', 'CH3', 135.0441, 100.0, 'MSBNK-Eawag-EA067413']
  ]),
  pathway('Trimethoprim [M+H]+', 'C14H18N4O3', '[M+H]+', [
    ['C14H19N4O3', null, null, 291.1451, 100.0, 'MSBNK-Eawag-EA019904'],
    ['C13H16N4O3', 'C14H19N4O3', 'CH3', 276.1218, 25.3, 'MSBNK-Eawag-EA019914'],
    ['C12H13N4O3', 'C13H16N4O3', 'CH3', 261.0984, 100.0, 'MSBNK-Eawag-EA019905'],
    ['C13H15N4O3', 'C14H19N4O3', 'CH4', 275.116, 71.7, 'MSBNK-BAFG-CSL23111012830'],
    ['C13H13N4O2', 'C13H15N4O3', 'H2O', 257.1031, 67.5, 'MSBNK-Athens_Univ-AU266604'],
    ['C12H14N4O', 'C14H19N4O3', 'C2H5O2', 230.1165, 100.0, 'MSBNK-Eawag-EA019914'],
    ['C5H7N4', 'C14H19N4O3', 'C9H12O3', 123.0666, 100.0, 'MSBNK-BAFG-CSL23111012826'],
    ['C10H13O3', 'C14H19N4O3', 'C4H6N4', 181.086, 11.2, 'MSBNK-Eawag-EA019914']
  ]),
  pathway('Carbamazepine [M+H]+', 'C15H12N2O', '[M+H]+', [
    ['C15H13N2O', null, null, 237.1022, 100.0, 'MSBNK-BAFG-CSL2311107613'],
    ['C14H12N', 'C15H13N2O', 'CHNO', 194.0964, 100.0, 'MSBNK-Eawag-EA019404'],
    ['C14H11N', 'C14H12N', 'H', 193.0886, 100.0, 'MSBNK-LCSB-LU126606'],
    ['C14H10N', 'C14H12N', 'H2', 192.0812, 100.0, 'MSBNK-BAFG-CSL2311107616'],
    ['C13H9N', 'C14H12N', 'CH3', 179.0726, 57.0, 'MSBNK-Fiocruz-FIO01108']
  ]),
  pathway('Diclofenac [M+H]+', 'C14H11Cl2NO2', '[M+H]+', [
    ['C14H12Cl2NO2', null, null, 296.024, 100.0, 'MSBNK-Eawag-EA020102'],
    ['C14H10Cl2NO', 'C14H12Cl2NO2', 'H2O', 278.0135, 100.0, 'MSBNK-Eawag-EA020114'],
    ['C13H10Cl2N', 'C14H10Cl2NO', 'CO', 250.0187, 100.0, 'MSBNK-LCSB-LU018601'],
    ['C13H10ClN', 'C13H10Cl2N', 'Cl', 215.0496, 100.0, 'MSBNK-Eawag-EA020103'],
    ['C13H10N', 'C13H10ClN', 'Cl', 180.0799, 7.1, 'MSBNK-BAFG-CSL2311107700'],
    ['C13H9ClN', 'C13H10Cl2N', 'ClH', 214.0418, 100.0, 'MSBNK-Eawag-EA020111'],
    ['C13H9N', 'C13H9ClN', 'Cl', 179.0724, 100.0, 'MSBNK-BAFG-CSL2311107700']
  ]),
  pathway('Tetracycline [M+H]+', 'C22H24N2O8', '[M+H]+', [
    ['C22H25N2O8', null, null, 445.1604, 100.0, 'MSBNK-HBM4EU-HB001901'],
    ['C22H22NO8', 'C22H25N2O8', 'H3N', 428.1341, 37.3, 'MSBNK-Eawag-EQ323501'],
    ['C22H20NO7', 'C22H22NO8', 'H2O', 410.1234, 100.0, 'MSBNK-HBM4EU-HB001903'],
    ['C22H23N2O7', 'C22H25N2O8', 'H2O', 427.15, 100.0, 'MSBNK-HBM4EU-HB001904'],
    ['C7H8NO3', 'C22H25N2O8', 'C15H17NO5', 154.0499, 100.0, 'MSBNK-HBM4EU-HB001910']
  ])
];
