export * from './accounts';
export * from './review';
export * from './studies';
export * from './trees';
