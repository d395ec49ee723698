import { chargeText } from './columns';
import { layoutGraph, type GraphEdge, type GraphNode } from './graph-layout';
import { mzDecimals, type Report } from './model';
import { formulaAt, formulaWidth, head, INK, line, n, svgDocument, textAt } from './svg';

const TOP = 52;
const ROW = 32;
const LEFT = 24;
const SIZE = 11.5;
const LOSS = 9.5;

interface Frame {
  /** px from the start of one column to that of the next. */
  step: number;
  /** px that a node's formula takes at most. */
  node: number;
}

const chargeOf = (node: GraphNode) => chargeText(node.charge, node.oddElectron);
const lossWidth = ({ loss, radical }: GraphEdge) => formulaWidth(loss, LOSS, radical ? '•' : '', '− ');

function frameOf(nodes: readonly GraphNode[], edges: readonly GraphEdge[]): Frame {
  const node = Math.max(60, ...nodes.map((own) => formulaWidth(own.formula, SIZE, chargeOf(own)))) + 16;
  const loss = Math.max(40, ...edges.map(lossWidth));
  return { node, step: node + loss + 46 };
}

const xOf = (node: GraphNode, { step }: Frame) => LEFT + node.column * step;
const yOf = (node: GraphNode) => TOP + node.row * ROW + 12;

function drawNode(node: GraphNode, frame: Frame, decimals: number): string {
  const [x, y] = [xOf(node, frame), yOf(node)];
  return (
    head(node.state, x, y - 4) +
    formulaAt(x + 10, y, node.formula, { size: SIZE, charge: chargeOf(node) }) +
    textAt(x + 10, y + 13, node.mz.toFixed(decimals), { size: 10, mono: true, fill: INK.ink2 })
  );
}

/** Measured: solid and heavy. Inferred: thin and dashed. */
const strokeOf = (measured: boolean) =>
  measured ? `stroke="${INK.ink}" stroke-width="1.9"` : `stroke="${INK.ink3}" stroke-width="1" stroke-dasharray="4 3"`;

function drawEdge({ from, to, measured, ...edge }: GraphEdge, frame: Frame): string {
  const [y1, y2] = [yOf(from) - 4, yOf(to) - 4];
  const x1 = xOf(from, frame) + 12 + formulaWidth(from.formula, SIZE, chargeOf(from)) + 4;
  const x2 = xOf(to, frame) - 7;
  const bend = xOf(from, frame) + frame.node + 10;
  const width = lossWidth({ from, to, measured, ...edge });
  const label = formulaAt(x2 - width - 6, y2 - 4, edge.loss, {
    ...{ size: LOSS, fill: INK.ink2, prefix: '− ', charge: edge.radical ? '•' : '' }
  });
  const path =
    y1 === y2
      ? `M${n(x1)} ${n(y1)}H${n(x2)}`
      : `M${n(x1)} ${n(y1)}H${n(bend - 8)}C${n(bend)} ${n(y1)} ${n(bend)} ${n(y1)} ${n(bend)} ${n(y1 + Math.sign(y2 - y1) * 8)}` +
        `V${n(y2 - Math.sign(y2 - y1) * 8)}C${n(bend)} ${n(y2)} ${n(bend)} ${n(y2)} ${n(bend + 8)} ${n(y2)}H${n(x2)}`;
  return `<path d="${path}" fill="none" ${strokeOf(measured)}/>${label}`;
}

function legend(leftOut: number): string {
  const [y, second] = [22, LEFT + 250];
  return (
    `<path d="M${LEFT} ${y - 4}h26" fill="none" ${strokeOf(true)}/>` +
    textAt(LEFT + 32, y, 'measured: isolated and fragmented', { size: 10.5, fill: INK.ink2 }) +
    `<path d="M${second} ${y - 4}h26" fill="none" ${strokeOf(false)}/>` +
    textAt(second + 32, y, 'inferred: by arithmetic alone', { size: 10.5, fill: INK.ink2 }) +
    (leftOut > 0
      ? textAt(LEFT, y + 16, `${leftOut} weaker formulas are in the table only.`, { size: 10, fill: INK.ink2 })
      : '')
  );
}

/**
 * Assigned ions with their losses, generations from left to right; the same formula of several spectra is drawn once.
 * Besides the edge that places an ion only measured edges are drawn, so that lines stay readable.
 * @returns SVG text in px units
 */
export function graphSvg(report: Report): string {
  const { nodes, edges, leaves, leftOut } = layoutGraph(report.rows);
  const shown = edges.filter((edge) => edge.to.column === edge.from.column + 1);
  const frame = frameOf(nodes, shown);
  const columns = 1 + Math.max(0, ...nodes.map((node) => node.column));
  const width = Math.max(620, LEFT + (columns - 1) * frame.step + frame.node + 24);
  const height = TOP + Math.max(1, leaves) * ROW + 16;
  const decimals = mzDecimals(report);
  const empty = nodes.length ? '' : textAt(LEFT, TOP + 20, 'No ion has a formula yet.', { size: 12, fill: INK.ink2 });
  const body =
    legend(leftOut) +
    line(LEFT, TOP - 8, width - 16, TOP - 8, INK.rule, 0.8) +
    shown.map((edge) => drawEdge(edge, frame)).join('') +
    nodes.map((node) => drawNode(node, frame, decimals)).join('') +
    empty;
  const measured = shown.filter((edge) => edge.measured).length;
  const description = `${nodes.length} ions, ${measured} measured and ${shown.length - measured} inferred links.`;
  return svgDocument(width, height, `Fragmentation tree of ${report.title}`, description, body);
}
