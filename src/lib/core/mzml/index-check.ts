/** Whether the index at the end of a file leads to its spectra, judged while the file is read from beginning to end. */
export class IndexCheck {
  /** where spectra begin, ascending. */
  private readonly starts: number[] = [];
  private isSpectra = false;
  /** offsets stated for spectra, and how many of them lead to none. */
  stated = 0;
  wrong = 0;

  spectrum(byte: number): void {
    this.starts.push(byte);
  }

  /** @param tag the text of an `index` start tag */
  index(tag: string): void {
    this.isSpectra = /\bname\s*=\s*["']spectrum["']/.test(tag);
  }

  /** @param text what an `offset` element holds */
  offset(text: string): void {
    if (!this.isSpectra) return;
    this.stated++;
    if (!/^\s*\d+\s*$/.test(text) || !this.isStart(Number(text))) this.wrong++;
  }

  private isStart(byte: number): boolean {
    const { starts } = this;
    let low = 0;
    let high = starts.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (starts[middle] < byte) low = middle + 1;
      else high = middle;
    }
    return starts[low] === byte;
  }
}
