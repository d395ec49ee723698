/** A stick that may carry a label; coordinates in pixels, y grows downwards. */
export interface Stick {
  x: number;
  /** y of its top */
  top: number;
  intensity: number;
  /** gets its label first, whatever its height. */
  favoured?: boolean;
}

export interface LabelBox {
  /** width and height of the text in pixels */
  width: number;
  height: number;
  /** distance of the text's lower edge from the stick's top */
  gap: number;
  left: number;
  right: number;
  /** at most so many */
  most: number;
}

export interface PlacedLabel<T extends Stick> {
  stick: T;
  /** centre of the text */
  x: number;
  /** its baseline */
  y: number;
}

interface Rect {
  left: number;
  right: number;
  top: number;
  bottom: number;
}
const meet = (a: Rect, b: Rect) => a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom;

/** First index whose x is at least `x` in sticks sorted by x. */
function firstFrom(xs: readonly number[], x: number): number {
  let low = 0;
  let high = xs.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (xs[middle] < x) low = middle + 1;
    else high = middle;
  }
  return low;
}

/**
 * Chooses which sticks are labelled so that no label lies on another or on a taller stick: the favoured first, then by
 * intensity. Labels at the edge are pushed inside.
 */
export function placeLabels<T extends Stick>(sticks: readonly T[], box: LabelBox): PlacedLabel<T>[] {
  const byX = [...sticks].sort((a, b) => a.x - b.x);
  const xs = byX.map((stick) => stick.x);
  const order = [...sticks].sort(
    (a, b) => Number(b.favoured ?? false) - Number(a.favoured ?? false) || b.intensity - a.intensity
  );
  const taken: Rect[] = [];
  const placed: PlacedLabel<T>[] = [];
  for (const stick of order) {
    if (placed.length >= box.most) break;
    const x = Math.min(Math.max(stick.x, box.left + box.width / 2), box.right - box.width / 2);
    const bottom = stick.top - box.gap;
    const rect = { left: x - box.width / 2 - 3, right: x + box.width / 2 + 3, top: bottom - box.height, bottom };
    if (taken.some((other) => meet(rect, other))) continue;
    if (!stick.favoured && crossed(byX, xs, rect, stick)) continue;
    taken.push(rect);
    placed.push({ stick, x, y: bottom - 2 });
  }
  return placed;
}

function crossed<T extends Stick>(byX: readonly T[], xs: readonly number[], rect: Rect, own: T): boolean {
  for (let i = firstFrom(xs, rect.left); i < byX.length && xs[i] <= rect.right; i++)
    if (byX[i] !== own && byX[i].top - 4 < rect.bottom) return true;
  return false;
}
