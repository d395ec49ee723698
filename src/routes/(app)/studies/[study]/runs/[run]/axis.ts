/** Round values from 0 or `from` to `to` at steps of 1, 2 or 5 times a power of ten. @param count about how many */
export function ticks(from: number, to: number, count: number): number[] {
  if (!(to > from)) return [from];
  const rough = (to - from) / count;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = power * ([1, 2, 5, 10].find((factor) => rough <= factor * power) ?? 10);
  const out: number[] = [];
  for (let i = Math.ceil(from / step); i * step <= to + step * 1e-9; i++) out.push(i * step);
  return out;
}

/** Index of the value nearest to `x` in an ascending list; -1 for an empty one. */
export function nearestIndex(values: readonly number[], x: number): number {
  let low = 0;
  let high = values.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (values[middle] < x) low = middle + 1;
    else high = middle;
  }
  if (low === 0) return values.length ? 0 : -1;
  if (low === values.length) return low - 1;
  return x - values[low - 1] <= values[low] - x ? low - 1 : low;
}

/** An intensity as "3.2e6", short enough for an axis. */
export function shortIntensity(value: number): string {
  if (value === 0) return '0';
  const power = Math.floor(Math.log10(Math.abs(value)));
  if (power < 4 && power >= -1) return String(Number(value.toPrecision(3)));
  return `${Number((value / 10 ** power).toFixed(1))}e${power}`;
}
