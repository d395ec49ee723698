/** A range of m/z shown on the shared axis. */
export interface Domain {
  from: number;
  to: number;
}

/** Narrowest range that can be zoomed to, in m/z. */
const MIN_SPAN = 0.05;

/** Position on screen of an m/z: linear from the domain to [left, right] in pixels. */
export function scaleOf(domain: Domain, left: number, right: number) {
  const perUnit = (right - left) / (domain.to - domain.from);
  return {
    x: (mz: number) => left + (mz - domain.from) * perUnit,
    mz: (x: number) => domain.from + (x - left) / perUnit
  };
}
export type Scale = ReturnType<typeof scaleOf>;

/** The range that holds all given m/z with a margin of 4 %; 0 to 100 when there are none. */
export function fullDomain(mzs: Iterable<number>): Domain {
  let low = Infinity;
  let high = -Infinity;
  for (const mz of mzs) {
    if (mz < low) low = mz;
    if (mz > high) high = mz;
  }
  if (low > high) return { from: 0, to: 100 };
  const margin = Math.max((high - low) * 0.04, 1);
  return { from: Math.max(0, low - margin), to: high + margin };
}

/** Moves a range inside the whole one, keeping its width where it fits. */
export function clampDomain(domain: Domain, whole: Domain): Domain {
  const span = Math.min(Math.max(domain.to - domain.from, MIN_SPAN), whole.to - whole.from);
  const from = Math.min(Math.max(domain.from, whole.from), whole.to - span);
  return { from, to: from + span };
}

/** Zooms by a factor (below 1: closer) about an m/z that stays in place. */
export function zoomDomain(domain: Domain, whole: Domain, factor: number, about: number): Domain {
  const span = Math.max((domain.to - domain.from) * factor, MIN_SPAN);
  const share = (about - domain.from) / (domain.to - domain.from);
  return clampDomain({ from: about - share * span, to: about + (1 - share) * span }, whole);
}

/** Shifts by a share of the shown width; positive goes to higher m/z. */
export function panDomain(domain: Domain, whole: Domain, share: number): Domain {
  const shift = (domain.to - domain.from) * share;
  return clampDomain({ from: domain.from + shift, to: domain.to + shift }, whole);
}

export const isWhole = (domain: Domain, whole: Domain): boolean =>
  domain.from <= whole.from + 1e-9 && domain.to >= whole.to - 1e-9;

/** Tick positions at 1, 2, 4 or 5 times a power of ten, at most `most` of them, ascending. */
export function ticksOf(domain: Domain, most: number): number[] {
  const rough = (domain.to - domain.from) / Math.max(1, most);
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 4, 5, 10].map((m) => m * power).find((s) => s >= rough) ?? 10 * power;
  const first = Math.ceil(domain.from / step - 1e-9);
  const last = Math.floor(domain.to / step + 1e-9);
  return Array.from({ length: Math.max(0, last - first + 1) }, (_, i) => (first + i) * step);
}

/** Decimals that tell neighbouring ticks apart. */
export function tickDecimals(ticks: readonly number[]): number {
  if (ticks.length < 2) return 0;
  return Math.max(0, -Math.floor(Math.log10(ticks[1] - ticks[0]) + 1e-9));
}
