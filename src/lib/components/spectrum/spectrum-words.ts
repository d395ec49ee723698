import { plural } from '$lib/components/ui/format';
import type { SpectrumView } from '$lib/schema/workbench';

/** "HCD 30 %, 12 scans"; several energies as a range. */
export function howMeasured(spectrum: SpectrumView): string {
  const { activations, energies, energyUnit, scanCount } = spectrum;
  const sorted = [...energies].sort((a, b) => a - b);
  const [low, high] = [sorted[0], sorted[sorted.length - 1]];
  const unit = energyUnit ? ` ${energyUnit}` : '';
  const energy = low === undefined ? '' : low === high ? ` ${low}${unit}` : ` ${low}–${high}${unit}`;
  return `${activations.join('+') || 'fragmented'}${energy}, ${plural(scanCount, 'scan')}`;
}

/** "MS3 of 301.1547" in plain text, for titles and screen readers. */
export const laneName = (spectrum: SpectrumView, decimals: number): string =>
  `MS${spectrum.level} of ${(spectrum.path.at(-1) ?? 0).toFixed(decimals)}`;

/** The isolated m/z of every stage, MS2 precursor first. */
export const pathText = (spectrum: SpectrumView, decimals: number): string =>
  spectrum.path.map((mz) => mz.toFixed(decimals)).join(' → ');
