import { pathText } from './columns';
import { mzDecimals, type Report, type ReportRow } from './model';

type Value = string | number | null;

/**
 * A field after RFC 4180. Text that a spreadsheet would run as a formula gets an apostrophe before it; numbers do not
 * need one and keep their sign.
 */
export function csvField(value: Value): string {
  if (value === null) return '';
  if (typeof value === 'number') return String(value);
  const safe = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

const round = (value: number | null, decimals: number): number | null =>
  value === null ? null : Number(value.toFixed(decimals)) + 0;

const FIELDS: readonly [name: string, value: (row: ReportRow, report: Report) => Value][] = [
  ['stage', (row) => row.level],
  ['isolated_mz', (row, report) => pathText(row, mzDecimals(report))],
  ['mz_found', (row) => round(row.found, 6)],
  ['ion_formula', (row) => row.formula],
  ['charge', (row) => row.charge],
  ['electrons', (row) => (row.formula === null ? null : row.oddElectron ? 'odd' : 'even')],
  ['mz_calculated', (row) => round(row.calculated, 6)],
  ['error_ppm', (row) => round(row.errorPpm, 2)],
  ['dbe', (row) => row.dbe],
  ['loss', (row) => row.loss],
  ['loss_radical', (row) => (row.loss === null ? null : row.lossRadical ? 'yes' : 'no')],
  ['from_formula', (row) => row.fromFormula],
  ['link', (row) => row.link],
  ['intensity_percent', (row) => round(row.intensity, 2)],
  ['scans', (row) => row.scans],
  ['claim', (row) => row.state],
  ['confirmed_by', (row) => row.confirmedBy],
  ['tree', (_, report) => report.title],
  ['revision', (_, report) => report.source.revision ?? 'draft'],
  ['status', (_, report) => (report.draft ? 'draft' : 'approved')],
  ['sha256', (_, report) => report.source.hash]
];

/** The table of ions with every column, as CSV after RFC 4180 (UTF-8, CRLF, header line). */
export function reportCsv(report: Report): string {
  const lines = [
    FIELDS.map(([name]) => name),
    ...report.rows.map((row) => FIELDS.map(([, value]) => csvField(value(row, report))))
  ];
  return lines.map((fields) => fields.join(',')).join('\r\n') + '\r\n';
}
