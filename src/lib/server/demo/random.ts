/** Source of numbers that looks random and gives the same row for the same seed, so that demo files never change. */
export interface Chance {
  /** 0 ≤ x < 1 */
  uniform(): number;
  /** standard normal */
  normal(): number;
}

/**
 * A 32-bit Weyl sequence whose values are mixed by two rounds of multiply and shift.
 * @param seed any integer
 */
export function chanceOf(seed: number): Chance {
  let state = seed >>> 0;
  const uniform = () => {
    state = (state + 0x9e3779b9) >>> 0;
    let mixed = state ^ (state >>> 16);
    mixed = Math.imul(mixed, 0x21f0aaad);
    mixed = Math.imul(mixed ^ (mixed >>> 15), 0x735a2d97);
    return ((mixed ^ (mixed >>> 15)) >>> 0) / 2 ** 32;
  };
  // Box and Muller 1958; the first number is kept away from 0, whose logarithm is infinite.
  const normal = () => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());
  return { uniform, normal };
}
