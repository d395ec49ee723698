import { z } from 'zod';
import type { PeakList } from '$lib/core/model';
import type { BreakdownPoint } from '$lib/schema/workbench';

const headerSchema = z.object({ precursors: z.array(z.object({ energy: z.number().nullable() })) });

/** Energy of a stored scan header's last precursor; null when the file gave none. */
export function energyOf(header: unknown): number | null {
  const read = headerSchema.safeParse(header);
  return read.success ? (read.data.precursors.at(-1)?.energy ?? null) : null;
}

/** Share 0..1 of the intensity within ±window (m/z) of an m/z; 0 for an empty scan. */
function shareOf(peaks: PeakList, mz: number, window: number): number {
  let all = 0;
  let near = 0;
  for (let i = 0; i < peaks.mz.length; i++) {
    all += peaks.intensity[i];
    if (Math.abs(peaks.mz[i] - mz) <= window) near += peaks.intensity[i];
  }
  return all > 0 ? near / all : 0;
}

/**
 * Breakdown curve: mean share of an ion in the current of the scans taken at each energy, ascending energy.
 * Scans without a stated energy are left out.
 * @param window half width in m/z
 */
export function breakdownOf(
  scans: readonly { energy: number | null; peaks: PeakList }[],
  mz: number,
  window: number
): BreakdownPoint[] {
  const byEnergy = new Map<number, number[]>();
  for (const { energy, peaks } of scans)
    if (energy !== null) byEnergy.set(energy, [...(byEnergy.get(energy) ?? []), shareOf(peaks, mz, window)]);
  return [...byEnergy]
    .map(([energy, shares]) => ({
      energy,
      share: shares.reduce((a, b) => a + b, 0) / shares.length,
      scans: shares.length
    }))
    .sort((a, b) => a.energy - b.energy);
}
