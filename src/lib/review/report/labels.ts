/** A label that wants to stand at (x, bottom): centre and baseline in px. */
export interface Label {
  x: number;
  bottom: number;
  width: number;
  height: number;
}
export interface Box {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

const overlaps = (a: Box, b: Box): boolean =>
  a.left < b.right && b.left < a.right && a.top < b.bottom && b.top < a.bottom;

/**
 * Chooses which labels can be drawn without touching each other or any obstacle; earlier ones win, so the caller orders
 * them by importance. A label may be pushed sideways as long as it stays over its stick.
 * @returns centre x of each label, null where it has no place; parallel to `labels`
 */
export function placeLabels(
  labels: readonly Label[],
  left: number,
  right: number,
  obstacles: readonly Box[] = []
): (number | null)[] {
  const taken: Box[] = [...obstacles];
  return labels.map((label) => {
    const half = label.width / 2;
    for (const shift of [0, 0.3, -0.3, 0.48, -0.48]) {
      const x = Math.min(Math.max(label.x + shift * label.width, left + half), right - half);
      if (Math.abs(x - label.x) > half) continue;
      const box = {
        left: x - half - 2,
        right: x + half + 2,
        top: label.bottom - label.height,
        bottom: label.bottom + 1
      };
      if (taken.some((other) => overlaps(box, other))) continue;
      taken.push(box);
      return x;
    }
    return null;
  });
}
