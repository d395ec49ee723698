const DIGITS = 1e10;

/**
 * Natural logarithm to ten decimals. ECMAScript leaves the last bits of Math.log to the engine; a score must be the same
 * in every browser and on the server.
 */
export const naturalLog = (x: number): number => Math.round(Math.log(x) * DIGITS) / DIGITS;
