/** Collects what the reader noticed, one entry for each kind, with the scans concerned. */
import type { RunWarning } from '../model';

const NAMED_SCANS = 20;

export class WarningCollector {
  private readonly byCode = new Map<string, RunWarning>();

  /** The first message of a code is kept; later ones add their scan. */
  add(code: string, message: string, scan: string | null = null): void {
    const known = this.byCode.get(code) ?? { code, message, scans: [], count: 0 };
    known.count++;
    if (scan !== null && known.scans.length < NAMED_SCANS) known.scans.push(scan);
    this.byCode.set(code, known);
  }

  get list(): RunWarning[] {
    return [...this.byCode.values()].map((warning) => ({ ...warning, scans: [...warning.scans] }));
  }
}
