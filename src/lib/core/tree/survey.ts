/** The precursor ions that a run fragments, from scan headers alone: the list of the run page. */
import type { Polarity, ScanHeader } from '../model';
import { groupScans, timeSpan } from './group';
import type { PeaksOf } from './link';

export interface SurveyedPrecursor {
  /** m/z of the precursor ion, as in `AssembledTree.precursorMz`. */
  mz: number;
  charge: number | null;
  polarity: Polarity | null;
  /** number of scans by stage, e.g. {"2": 3, "3": 5}. */
  levels: Record<string, number>;
  /** number of merged spectra, i.e. different paths. */
  spectra: number;
  scanIds: string[];
  /** seconds, first and last scan. */
  time: [number, number] | null;
}

/**
 * Lists the precursor ions of a run with the stages each reaches, in the order and with the m/z of `assemble`.
 * @param headers all scans in the order of the file
 * @param peaksOf peaks by position in `headers`, asked only for scans that name nothing but an isolated m/z; without
 *   it such scans are joined to the nearest earlier scan of a larger precursor m/z
 */
export function surveyPrecursors(headers: readonly ScanHeader[], peaksOf: PeaksOf = () => null): SurveyedPrecursor[] {
  return groupScans(headers, peaksOf, { separateEnergies: false }).groups.map((group) => {
    const scans = group.spectra.flatMap((spectrum) => spectrum.scans).sort((a, b) => a.position - b.position);
    const levels: Record<string, number> = {};
    for (const { header } of scans) levels[header.level] = (levels[header.level] ?? 0) + 1;
    return {
      mz: group.mz,
      charge: group.charge,
      polarity: group.polarity,
      levels,
      spectra: group.spectra.length,
      scanIds: scans.map((scan) => scan.header.id),
      time: timeSpan(scans)
    };
  });
}
