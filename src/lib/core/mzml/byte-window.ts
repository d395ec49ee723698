/** The part of a byte stream that is still needed, addressed by absolute offsets. */
export class ByteWindow {
  private buffer = new Uint8Array(1 << 16);
  private filled = 0;
  /** absolute offset of the first byte held. */
  base = 0;
  /** the bytes held; index 0 is the byte at `base`. Valid until the next `push`. */
  bytes: Uint8Array = this.buffer.subarray(0, 0);

  /** Absolute offset behind the last byte. */
  get end(): number {
    return this.base + this.filled;
  }

  /** Appends a piece and lets go of everything before the absolute offset `keepFrom`. */
  push(piece: Uint8Array, keepFrom: number): void {
    const needless = Math.min(keepFrom - this.base, this.filled);
    // Moving bytes costs time, so that many small pieces are only moved when much is gained.
    const isWorthIt = needless * 2 >= this.filled || this.filled + piece.length > this.buffer.length;
    const dropped = isWorthIt ? needless : 0;
    const kept = this.filled - dropped;
    if (kept + piece.length > this.buffer.length) {
      const larger = new Uint8Array(Math.max(this.buffer.length * 2, kept + piece.length));
      larger.set(this.buffer.subarray(dropped, this.filled));
      this.buffer = larger;
    } else if (dropped > 0) {
      this.buffer.copyWithin(0, dropped, this.filled);
    }
    this.buffer.set(piece, kept);
    this.base += dropped;
    this.filled = kept + piece.length;
    this.bytes = this.buffer.subarray(0, this.filled);
  }

  /** Lets go of all bytes; the next ones pushed begin at the absolute offset `base`. */
  restart(base: number): void {
    this.base = base;
    this.filled = 0;
    this.bytes = this.buffer.subarray(0, 0);
  }

  /** A view of [from, to) by absolute offsets, valid until the next `push`. */
  slice(from: number, to: number): Uint8Array {
    return this.bytes.subarray(from - this.base, to - this.base);
  }
}
