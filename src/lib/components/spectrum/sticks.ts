import type { IonItem, MarkState } from '$lib/state/ion-rows';
import type { Domain, Scale } from './axis';
import type { Lane } from './lanes';

/** A stick of the cascade in pixels. */
export interface DrawnStick {
  ion: IonItem;
  x: number;
  top: number;
  intensity: number;
  favoured: boolean;
}

/** One path for all sticks and one for all heads of a state: thousands of ions stay a handful of elements. */
export interface StatePaths {
  state: MarkState;
  sticks: string;
  heads: string;
}

/** Colour of each state as a CSS variable; the head's shape says the same. */
export const STATE_COLOUR: Readonly<Record<MarkState, string>> = {
  open: 'var(--ink3)',
  proposed: 'var(--ochre)',
  confirmed: 'var(--moss)',
  rejected: 'var(--ink3)',
  disputed: 'var(--brick)'
};
/** Later ones are drawn above earlier ones. */
const DRAW_ORDER: readonly MarkState[] = ['open', 'rejected', 'proposed', 'confirmed', 'disputed'];

const n = (value: number) => value.toFixed(1);
const circle = (x: number, y: number, r: number) =>
  `M${n(x - r)} ${n(y)}a${r} ${r} 0 1 0 ${2 * r} 0a${r} ${r} 0 1 0 ${-2 * r} 0`;

const HEAD: Readonly<Record<MarkState, (x: number, y: number) => string>> = {
  open: () => '',
  proposed: (x, y) => circle(x, y, 3),
  confirmed: (x, y) => circle(x, y, 3.5),
  rejected: (x, y) => `M${n(x - 3)} ${n(y - 3)}l6 6m0 -6l-6 6`,
  disputed: (x, y) => `M${n(x)} ${n(y - 4.8)}l4.8 4.8l-4.8 4.8l-4.8 -4.8z`
};

/** The ions of a list sorted by m/z that lie in the domain. */
export function ionsWithin(ions: readonly IonItem[], { from, to }: Domain): IonItem[] {
  return ions.filter((ion) => ion.mz >= from && ion.mz <= to);
}

/** By how much weak ions are raised when the base peak lies outside the shown range; 1 when it is inside. */
export function raiseOf(shown: readonly IonItem[]): number {
  const tallest = shown.reduce((most, ion) => Math.max(most, ion.relative), 0);
  return tallest > 0 ? 100 / tallest : 1;
}

/** Pixel positions of the shown ions of a lane. */
export function drawSticks(
  shown: readonly IonItem[],
  lane: Lane,
  scale: Scale,
  raise: number,
  selected: number | null
): DrawnStick[] {
  return shown.map((ion) => ({
    ion,
    x: scale.x(ion.mz),
    top: lane.base - Math.max(1, (ion.relative / 100) * raise * lane.reach),
    intensity: ion.relative,
    favoured: ion.id === selected
  }));
}

/** Paths by state, in drawing order; states without ions are left out. */
export function pathsOf(sticks: readonly DrawnStick[], lane: Lane): StatePaths[] {
  return DRAW_ORDER.flatMap((state): StatePaths[] => {
    const own = sticks.filter((stick) => stick.ion.mark === state);
    if (!own.length) return [];
    const heads = lane.folded ? '' : own.map((stick) => HEAD[state](stick.x, stick.top)).join('');
    return [{ state, sticks: own.map((s) => `M${n(s.x)} ${n(lane.base)}V${n(s.top)}`).join(''), heads }];
  });
}

/** The stick that a pointer at x means: within `reach` pixels the nearest, stronger ones counting as nearer. */
export function stickNear(sticks: readonly DrawnStick[], x: number, reach = 7): DrawnStick | null {
  let best: DrawnStick | null = null;
  let least = Infinity;
  for (const stick of sticks) {
    const distance = Math.abs(stick.x - x);
    const cost = distance - Math.min(4, stick.intensity * 0.06);
    if (distance <= reach && cost < least) {
      least = cost;
      best = stick;
    }
  }
  return best;
}
