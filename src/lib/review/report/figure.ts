import { cascadeSvg } from './cascade';
import { graphSvg } from './graph';
import type { Report } from './model';

/** The figure that the reader chose, as SVG text: vector everywhere, light palette, on white. */
export const figureSvg = (report: Report): string =>
  report.figure === 'graph' ? graphSvg(report) : cascadeSvg(report);
