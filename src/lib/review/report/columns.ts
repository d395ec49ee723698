import type { ColumnKey } from './options';
import { mzDecimals, type Report, type ReportRow } from './model';

/** How a cell is set: plain text, a number, or a formula whose counts are lowered and whose charge is raised. */
export interface Cell {
  kind: 'text' | 'number' | 'formula';
  text: string;
  /** raised after a formula, e.g. "+", "2+", "−"; a radical has a dot. */
  charge?: string;
}

export interface Column {
  key: ColumnKey;
  /** heading; "m/z" in it is set in italics. */
  label: string;
  right: boolean;
  cell: (row: ReportRow, report: Pick<Report, 'unitResolution'>) => Cell;
}

const text = (value: string): Cell => ({ kind: 'text', text: value });
const number = (value: number | null, decimals: number): Cell => ({
  kind: 'number',
  text: value === null ? '' : minus(value.toFixed(decimals))
});
const minus = (digits: string): string => (Number(digits) === 0 ? digits.replace('-', '') : digits.replace('-', '−'));

/** Charge as written behind a formula: "+", "2+", "−"; a radical ion has "•" before it. */
export function chargeText(charge: number, radical = false): string {
  const n = Math.abs(charge);
  return `${radical ? '•' : ''}${n > 1 ? n : ''}${charge < 0 ? '−' : '+'}`;
}

/** Error with its sign and one decimal; never "−0.0". */
export function signedPpm(ppm: number): string {
  const digits = ppm.toFixed(1);
  return Number(digits) > 0 ? `+${digits}` : minus(digits);
}

const signed = (ppm: number | null): Cell => (ppm === null ? text('') : { kind: 'number', text: signedPpm(ppm) });

/** "MS3 195.0877 > 138.0662": stage with the isolated m/z. */
export const pathText = (row: Pick<ReportRow, 'path'>, decimals: number): string =>
  row.path.map((mz) => mz.toFixed(decimals)).join(' > ');

const formula = (value: string | null, charge?: string): Cell =>
  value === null ? text('') : { kind: 'formula', text: value, charge };

/** The columns of the table of ions, in the order in which they are printed. */
export const COLUMNS: readonly Column[] = [
  { key: 'stage', label: 'stage', right: false, cell: (row) => text(`MS${row.level}`) },
  { key: 'isolated', label: 'isolated m/z', right: false, cell: (row, r) => text(pathText(row, mzDecimals(r))) },
  { key: 'found', label: 'm/z found', right: true, cell: (row, r) => number(row.found, mzDecimals(r)) },
  {
    key: 'formula',
    label: 'ion formula',
    right: false,
    cell: (row) => formula(row.formula, chargeText(row.charge, row.oddElectron))
  },
  { key: 'calculated', label: 'm/z calculated', right: true, cell: (row) => number(row.calculated, 4) },
  { key: 'error', label: 'error ppm', right: true, cell: (row) => signed(row.errorPpm) },
  { key: 'dbe', label: 'DBE', right: true, cell: (row) => number(row.dbe, 1) },
  {
    key: 'loss',
    label: 'loss',
    right: false,
    cell: (row) => (row.isPrecursor ? text('precursor ion') : formula(row.loss, row.lossRadical ? '•' : undefined))
  },
  { key: 'link', label: 'link', right: false, cell: (row) => text(row.link ?? '') },
  { key: 'intensity', label: 'intensity %', right: true, cell: (row) => number(row.intensity, 1) },
  { key: 'scans', label: 'scans', right: true, cell: (row) => number(row.scans, 0) },
  { key: 'state', label: 'claim', right: false, cell: (row) => text(row.state) },
  { key: 'by', label: 'confirmed by', right: false, cell: (row) => text(row.confirmedBy ?? '') }
];

/** The columns that the reader chose. */
export const columnsOf = (report: Pick<Report, 'columns'>): Column[] =>
  COLUMNS.filter((column) => report.columns.includes(column.key));
