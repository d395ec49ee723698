import type { SpectrumView } from '$lib/schema/workbench';

/** Where a lane lies in the cascade, in pixels from its top. */
export interface Lane {
  spectrum: SpectrumView;
  folded: boolean;
  top: number;
  /** y of the line on which the sticks stand */
  base: number;
  height: number;
  /** room for the tallest stick */
  reach: number;
}

export interface LaneSizes {
  /** height that the lanes may fill before they scroll */
  available: number;
  /** room above the tallest stick for its label, and for the head in narrow layouts */
  headroom: number;
}

const FOLDED = 26;
const LEAST = 78;
const MOST = 128;
const TOP = 6;

/** Stage below stage: every lane under the lane it hangs on, children by descending isolated m/z. */
export function laneOrder(spectra: readonly SpectrumView[]): SpectrumView[] {
  return [...spectra].sort(
    (a, b) => a.level - b.level || (b.path.at(-1) ?? 0) - (a.path.at(-1) ?? 0) || a.index - b.index
  );
}

/** Lays the lanes out one below the other: they share the height while it suffices, then they keep a least height. */
export function layLanes(ordered: readonly SpectrumView[], folded: ReadonlySet<number>, sizes: LaneSizes): Lane[] {
  const open = ordered.filter((s) => !folded.has(s.index)).length;
  const rest = sizes.available - TOP - (ordered.length - open) * FOLDED;
  const height = Math.min(
    MOST + sizes.headroom,
    Math.max(LEAST + sizes.headroom / 2, Math.floor(rest / Math.max(1, open)))
  );
  let y = TOP;
  return ordered.map((spectrum) => {
    const isFolded = folded.has(spectrum.index);
    const tall = isFolded ? FOLDED : height;
    const lane = {
      spectrum,
      folded: isFolded,
      top: y,
      base: y + tall - (isFolded ? 4 : 10),
      height: tall,
      reach: isFolded ? FOLDED - 8 : tall - 10 - sizes.headroom
    };
    y += tall;
    return lane;
  });
}

/** Height of all lanes together. */
export const lanesHeight = (lanes: readonly Lane[]): number => {
  const last = lanes.at(-1);
  return last ? last.top + last.height : 0;
};

/** From the isolated ion in the upper lane down to the head of the lane it opened. */
export interface Connector {
  from: number;
  to: number;
  mz: number;
  y1: number;
  y2: number;
}

/** One connector for every lane whose precursor ion was isolated from another lane of the tree. */
export function connectorsOf(lanes: readonly Lane[]): Connector[] {
  const byIndex = new Map(lanes.map((lane) => [lane.spectrum.index, lane]));
  return lanes.flatMap((lane): Connector[] => {
    const { parent, path, linkedBy, index } = lane.spectrum;
    const above = parent === null || linkedBy === 'none' ? undefined : byIndex.get(parent);
    const mz = path.at(-1);
    if (!above || mz === undefined) return [];
    return [{ from: above.spectrum.index, to: index, mz, y1: above.base, y2: lane.base }];
  });
}
