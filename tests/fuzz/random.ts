/** Marsaglia's xorshift (J. Stat. Softw. 8(14), 2003), 32 bits, so that every case can be made again from its seed. */
export class Random {
  private x: number;

  constructor(seed: number) {
    this.x = Math.imul(seed + 1, 0x9e3779b1) | 0 || 1;
    for (let i = 0; i < 4; i++) this.next();
  }

  /** From 0 to below 1. */
  next(): number {
    this.x ^= this.x << 13;
    this.x ^= this.x >>> 17;
    this.x ^= this.x << 5;
    return (this.x >>> 0) / 2 ** 32;
  }

  /** A whole number from 0 to below `n`. */
  below(n: number): number {
    return Math.floor(this.next() * n);
  }

  pick<T>(list: readonly T[]): T {
    return list[this.below(list.length)];
  }
}
