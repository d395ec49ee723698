/** What a bench promises, and how it is printed. */

export interface Goal {
  what: string;
  measured: number;
  /** the bound. */
  limit: number;
  /** whether the bound is the highest or the lowest allowed. */
  bound: 'at most' | 'at least';
  unit?: string;
}

/** One file `tests/bench/<name>.bench.ts` exports one of these as `bench`. */
export interface Bench {
  title: string;
  /** @param args what follows the name on the command line */
  run(args: readonly string[]): Goal[] | Promise<Goal[]>;
}

export function isMet({ measured, limit, bound }: Goal): boolean {
  return bound === 'at most' ? measured <= limit : measured >= limit;
}

const rounded = (value: number) => (value >= 100 ? value.toFixed(0) : Number(value.toPrecision(3)).toString());

/** One line for each goal. */
export function goalLines(goals: readonly Goal[]): string[] {
  return goals.map((goal) => {
    const unit = goal.unit ? ` ${goal.unit}` : '';
    const verdict = isMet(goal) ? 'met   ' : 'MISSED';
    return `${verdict} ${goal.what}: ${rounded(goal.measured)}${unit} (${goal.bound} ${rounded(goal.limit)}${unit})`;
  });
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  if (sorted.length === 0) return NaN;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

/** The value behind `--name`, or the default. */
export function option(args: readonly string[], name: string, fallback: string): string {
  const at = args.indexOf(`--${name}`);
  const value = at < 0 ? undefined : args[at + 1];
  if (at >= 0 && value === undefined) throw new RangeError(`--${name} needs a value`);
  return value ?? fallback;
}
