import type { CurrentTrace } from '$lib/schema/run';

/** Points of one trace; more than a screen has columns is never drawn. */
const POINTS = 600;

export interface CurrentPoint {
  index: number;
  level: number;
  /** seconds */
  time: number | null;
  /** total ion current, as measured */
  current: number;
}

/** Keeps the strongest point of each slice of a long trace, so that no peak is lost. */
function thinned(points: CurrentPoint[], x: (point: CurrentPoint) => number): CurrentPoint[] {
  if (points.length <= POINTS) return points;
  const first = x(points[0]);
  const width = (x(points[points.length - 1]) - first) / POINTS || 1;
  const strongest = new Map<number, CurrentPoint>();
  for (const point of points) {
    const slice = Math.min(POINTS - 1, Math.floor((x(point) - first) / width));
    const held = strongest.get(slice);
    if (!held || point.current > held.current) strongest.set(slice, point);
  }
  return [...strongest].sort(([a], [b]) => a - b).map(([, point]) => point);
}

/**
 * Ion current over time, one trace for each stage (MS1 first), each of at most 600 points.
 * @param points one for each scan, in the order of the file
 * @returns `x` in seconds, or scan numbers (`byTime` false) where a scan states no time
 */
export function currentTraces(points: CurrentPoint[]): { byTime: boolean; traces: CurrentTrace[] } {
  const byTime = points.every((point) => point.time !== null);
  const x = (point: CurrentPoint) => (byTime ? (point.time ?? 0) : point.index);
  const levels = [...new Set(points.map((point) => point.level))].sort((a, b) => a - b);
  const traces = levels.map((level) => {
    const own = points.filter((point) => point.level === level).sort((a, b) => x(a) - x(b));
    const kept = thinned(own, x);
    return { level, x: kept.map(x), y: kept.map((point) => point.current) };
  });
  return { byTime, traces };
}
