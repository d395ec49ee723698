/** From a mass and a window to compositions, and the chemical rules on them. */
export * from './tolerance';
export * from './solve';
export * from './enumerate';
export * from './rules';
