import { reportCsv } from '$lib/review/report/csv';
import { figureSvg } from '$lib/review/report/figure';
import { ServiceError } from '../errors';
import type { PrintedReport } from './printed';
import { renderPdf } from './pdf';
import { reportDocument } from './pdf-document';

export const REPORT_FILES = ['report.pdf', 'ions.csv', 'figure.svg', 'tree.json'] as const;
export type ReportFile = (typeof REPORT_FILES)[number];

const TYPES: Record<ReportFile, string> = {
  'report.pdf': 'application/pdf',
  'ions.csv': 'text/csv; charset=utf-8; header=present',
  'figure.svg': 'image/svg+xml; charset=utf-8',
  'tree.json': 'application/json; charset=utf-8'
};

const isFile = (name: string): name is ReportFile => (REPORT_FILES as readonly string[]).includes(name);

/** The name of the route as a file of the report. @throws ServiceError not-found */
export function reportFile(name: string): ReportFile {
  if (isFile(name)) return name;
  throw new ServiceError('not-found', 'The report has no such file.', `Choose one of ${REPORT_FILES.join(', ')}.`);
}

/** "unknown-a-revision-2.pdf": letters and digits only, so that no name can break the header or a path. */
export function fileName({ report }: PrintedReport, file: ReportFile): string {
  const words = report.title
    .normalize('NFKD')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+|-+$/g, '')
    .slice(0, 60);
  const state =
    report.source.revision === null ? 'draft' : `revision-${report.source.revision}${report.draft ? '-draft' : ''}`;
  const [kind, extension] = file.split('.');
  const part = file === 'report.pdf' ? '' : `-${kind}`;
  return `${words || 'tree'}-${state}${part}.${extension}`;
}

async function body(printed: PrintedReport, file: ReportFile): Promise<string | Buffer> {
  const { report, json } = printed;
  switch (file) {
    case 'report.pdf':
      return renderPdf(reportDocument(report, figureSvg(report)));
    case 'ions.csv':
      return reportCsv(report);
    case 'figure.svg':
      return figureSvg(report);
    case 'tree.json':
      return json;
  }
}

/** One download of a report. */
export async function reportDownload(printed: PrintedReport, file: ReportFile): Promise<Response> {
  const content = await body(printed, file);
  return new Response(typeof content === 'string' ? content : new Uint8Array(content), {
    headers: {
      'content-type': TYPES[file],
      'content-disposition': `attachment; filename="${fileName(printed, file)}"`,
      'cache-control': 'private, no-store',
      // An SVG opened by itself must not run or load anything.
      'content-security-policy': "default-src 'none'; style-src 'unsafe-inline'"
    }
  });
}
