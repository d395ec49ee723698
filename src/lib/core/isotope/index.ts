/** Isotope patterns of ions and how well a measured MS1 fits them. */
export * from './pattern';
export * from './likelihood';
