import type { Report } from '$lib/review/report/model';

/** A report with the canonical text of the tree that it prints. */
export interface PrintedReport {
  report: Report;
  /** canonical JSON; its SHA-256 is `report.source.hash`. */
  json: string;
}
