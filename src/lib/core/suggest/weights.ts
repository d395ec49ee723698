/**
 * Parameters of the scoring terms, natural-log units. Forms after published fragmentation-tree scores (maximum a
 * posteriori form: J. Cheminform. 8, 5, 2016; loss-mass and hetero-atom terms: Bioinformatics 24, i49, 2008;
 * loss lists: Anal. Chem. 83, 1243, 2011). Penalties are log ratios; none is a filter.
 */
export const WEIGHTS = {
  /** search window in standard deviations of the mass error. */
  windowSigmas: 3,
  /** how much narrower mass errors are judged within one ion than between precursor formulas. */
  massEmphasis: 14,
  /** reward of explaining a peak at all: log odds that a peak above the cut-off is signal. */
  explained: 0.3,
  /** noise intensities follow a Pareto law; its exponent. */
  noiseExponent: 0.6,
  /** relative intensity at which noise ends to be certain. */
  noiseCutOff: 0.002,
  /** part of the log number of sub-formulas in an ion's window by which its explanation is worth less. */
  chance: 0.5,
  /** losses of specifications, of records, and of common practice. */
  lossListed: 2,
  lossSeen: 1.5,
  lossPractice: 0.5,
  /** log 0.01: no mechanism known. */
  lossImplausible: -4.6,
  /** even-electron ions seldom lose radicals: 10 of 92 products of a checked set are odd-electron. */
  radicalListed: -1,
  radicalOther: -3.5,
  /** a radical ion losing a radical turns even-electron again. */
  radicalBack: -0.5,
  /** hetero atoms per carbon of a fragment: mean and standard deviation of the normal penalty above the mean. */
  heteroMean: 0.59,
  heteroDeviation: 0.56,
  /** a fragment with fewer than 0 rings and double bonds. */
  saturatedIon: -1.5,
  /** an ion that took up water in the trap. */
  waterAdduct: -3.5
} as const;
