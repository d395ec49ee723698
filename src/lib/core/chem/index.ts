/** Elements, compositions, adducts and losses: the chemistry that every other area of the core builds on. */
export * from './elements';
export * from './composition';
export * from './element-ranges';
export * from './adducts';
export * from './adduct-name';
export * from './losses';
export * from './background-ions';
