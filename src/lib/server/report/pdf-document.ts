import type { Column, Content, ContentTable, TableCell, TDocumentDefinitions } from 'pdfmake/interfaces';
import { CAUTION } from '$lib/review/report/caution';
import { columnsOf, signedPpm } from '$lib/review/report/columns';
import { leftOutText, mzDecimals, type Report } from '$lib/review/report/model';
import { INK } from '$lib/review/report/svg';
import { cellContent, ionRuns, ionTypeRuns, formulaRuns, MONO, mzRuns, proseRuns, SANS } from './pdf-text';

/** Rows that one PDF prints; more belong into the CSV, and typesetting them would hold the server up. */
export const MOST_ROWS = 1000;
/** Printable area of A4 inside the margins, in points. */
const [WIDTH, FIGURE_HEIGHT] = [515, 590];

const day = new Intl.DateTimeFormat('en-GB', { dateStyle: 'long', timeStyle: 'short', timeZone: 'UTC' });
const when = (iso: string): string => `${day.format(new Date(iso))} UTC`;

const heading = (text: string): Content => ({ text, bold: true, fontSize: 10.5, margin: [0, 14, 0, 4] });

function fact(name: string, value: Content): Column {
  return { stack: [{ text: mzRuns(name), fontSize: 7.5, color: INK.ink2 }, value], width: 'auto' };
}

function facts(report: Report): Content {
  const { tree } = report;
  const value = (text: Content | Content[]): Content => ({ text: Array.isArray(text) ? text : [text], fontSize: 10.5 });
  const mono = (text: string): Content => ({ text, font: MONO });
  const error = tree.errorPpm === null ? '–' : `${signedPpm(tree.errorPpm)} ppm`;
  return {
    columns: [
      fact('precursor m/z found', value(mono(tree.precursorMz.toFixed(mzDecimals(report))))),
      fact('m/z calculated', value(mono(tree.calculatedMz?.toFixed(4) ?? '–'))),
      fact('error', value(mono(error))),
      fact('ion', value(tree.adduct ? ionTypeRuns(tree.adduct) : mono('–'))),
      fact('ion formula', value(ionRuns(tree.ionFormula, tree.charge ?? (tree.polarity === 'negative' ? -1 : 1)))),
      fact('molecule', value(tree.formula ? formulaRuns(tree.formula) : mono('–'))),
      fact('ion current explained', value(mono(`${(tree.explained * 100).toFixed(1)} %`)))
    ],
    columnGap: 16,
    margin: [0, 8, 0, 10]
  };
}

const hairlines: NonNullable<ContentTable['layout']> = {
  hLineWidth: (i, node) => (i === 1 ? 0.8 : i === 0 || i === node.table.body.length ? 0 : 0.3),
  vLineWidth: () => 0,
  hLineColor: (i) => (i === 1 ? INK.ink3 : INK.rule),
  paddingLeft: (i) => (i === 0 ? 0 : 5),
  paddingRight: () => 3,
  paddingTop: () => 2.5,
  paddingBottom: () => 2
};

function ionTable(report: Report): Content {
  const columns = columnsOf(report);
  const rows = report.rows.slice(0, MOST_ROWS);
  const head: TableCell[] = columns.map(({ label, right }) => ({
    ...{ text: mzRuns(label), bold: true, fontSize: 7.5, color: INK.ink2, alignment: right ? 'right' : 'left' }
  }));
  const body = rows.map((row) => columns.map(({ cell, right }): TableCell => cellContent(cell(row, report), right)));
  const further = report.rows.length - rows.length;
  const notes = [
    'Intensities are percent of the base peak of their spectrum; calculated m/z count the electron; errors come from unrounded values.',
    ...(report.leftOut ? [leftOutText(report.leftOut)] : []),
    ...(further ? [`${further} further ions are in the CSV file.`] : [])
  ];
  return [
    {
      table: {
        headerRows: 1,
        dontBreakRows: true,
        widths: columns.map((c) => (c.key === 'by' ? '*' : 'auto')),
        body: [head, ...body]
      },
      layout: hairlines,
      fontSize: 8
    },
    { text: mzRuns(notes.join(' ')), fontSize: 7.5, color: INK.ink2, margin: [0, 4, 0, 0] }
  ];
}

function approvals({ source, draft }: Report): Content {
  const who = source.approvals.map(({ name, at }): Content => ({ text: `Approved by ${name}, ${when(at)}.` }));
  const none: Content = { text: 'Nobody has approved this state of the tree.', bold: true };
  const frozen =
    source.revision === null
      ? `Printed ${when(source.at)} from the draft.`
      : `Revision ${source.revision}, frozen ${when(source.at)}.`;
  return [
    ...(draft ? [none, ...who] : who),
    { text: frozen },
    { text: [{ text: 'SHA-256 ' }, { text: source.hash, font: MONO, fontSize: 7.5 }] },
    { text: 'The hash is that of the JSON file of this tree.', fontSize: 7.5, color: INK.ink2 }
  ];
}

/** The figure fills the width, or the height of a page where it is taller than wide. */
function figure(svg: string, report: Report): Content {
  const size = /width="([\d.]+)" height="([\d.]+)"/.exec(svg);
  const [width, height] = size ? [Number(size[1]), Number(size[2])] : [WIDTH, FIGURE_HEIGHT];
  const scale = Math.min(WIDTH / width, FIGURE_HEIGHT / height);
  const caption =
    report.figure === 'graph'
      ? 'Fragmentation tree: ions with formula and m/z, losses on the links; solid links were measured, dashed ones inferred.'
      : 'Cascade: every spectrum on one m/z axis; arrows lead from isolated ions to the spectra they gave.';
  return [
    { svg, width: width * scale, height: height * scale },
    { text: mzRuns(caption), fontSize: 7.5, color: INK.ink2, margin: [0, 4, 0, 0] }
  ];
}

/** The report as pdfmake's document definition; pure, so that tests read what will be printed. */
export function reportDocument(report: Report, svg: string): TDocumentDefinitions {
  return {
    info: {
      title: `${report.title}, ${report.status}`,
      subject: 'Fragmentation tree by multi-stage mass spectrometry',
      creator: 'Rivenmark'
    },
    pageSize: 'A4',
    pageMargins: [40, 44, 40, 62],
    defaultStyle: { font: SANS, fontSize: 9, color: INK.ink, lineHeight: 1.15 },
    ...(report.draft
      ? { watermark: { text: 'Draft', font: SANS, color: INK.brick, opacity: 0.13, bold: true, angle: -52 } }
      : {}),
    header: {
      text: `${report.study} / ${report.title} · ${report.status}`,
      fontSize: 7.5,
      color: INK.ink2,
      margin: [40, 22, 40, 0]
    },
    footer: (page, pages) => ({
      columns: [
        { text: CAUTION, fontSize: 6.5, color: INK.ink2, width: '*' },
        { text: `${page} / ${pages}`, fontSize: 7.5, color: INK.ink2, width: 50, alignment: 'right' }
      ],
      margin: [40, 14, 40, 0]
    }),
    content: [
      { text: report.title, fontSize: 17, margin: [0, 0, 0, 1] },
      { text: `${report.run.fileName} · ${report.status}`, color: INK.ink2 },
      facts(report),
      figure(svg, report),
      heading('Ions'),
      ionTable(report),
      heading('Methods'),
      ...report.methods.map((text): Content => ({ text: proseRuns(text, report.tree), margin: [0, 0, 0, 4] })),
      heading('Confidence'),
      { text: report.confidence.text },
      ...(report.confidence.note ? [{ text: report.confidence.note, color: INK.ink2 }] : []),
      heading('Approval'),
      { stack: [approvals(report)].flat(), unbreakable: true }
    ]
  };
}
