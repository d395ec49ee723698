import type { StylesheetJson } from 'cytoscape';
import type { GraphNode } from './graph-model';

/** Colours and fonts of the page as it is themed now. */
export interface GraphColours {
  ink: string;
  ink2: string;
  ink3: string;
  sheet: string;
  wash: string;
  moss: string;
  ochre: string;
  brick: string;
}

/** Reads the theme's variables from an element. */
export function coloursOf(element: Element): GraphColours {
  const style = getComputedStyle(element);
  const read = (name: string) => style.getPropertyValue(`--${name}`).trim();
  return {
    ...{ ink: read('ink'), ink2: read('ink2'), ink3: read('ink3'), sheet: read('sheet'), wash: read('wash') },
    ...{ moss: read('moss'), ochre: read('ochre'), brick: read('brick') }
  };
}

const MARKS: Readonly<Record<GraphNode['mark'], (c: GraphColours) => string>> = {
  confirmed: (c) => `<circle cx="6" cy="6" r="3.8" fill="${c.moss}"/>`,
  proposed: (c) => `<circle cx="6" cy="6" r="3.2" fill="none" stroke="${c.ochre}" stroke-width="1.6"/>`,
  disputed: (c) => `<path d="M6 1 11 6 6 11 1 6z" fill="${c.brick}"/>`,
  rejected: (c) => `<path d="m3 3 6 6m0-6-6 6" stroke="${c.ink3}" stroke-width="1.5"/>`,
  open: (c) => `<path d="M6 3v6" stroke="${c.ink3}" stroke-width="1.6"/>`,
  unseen: () => ''
};

/** The state's mark as an image that cytoscape can draw beside the text. */
export const markImage = (mark: GraphNode['mark'], colours: GraphColours): string =>
  `data:image/svg+xml;utf8,${encodeURIComponent(`<svg xmlns="http://www.w3.org/2000/svg" width="12" height="12" viewBox="0 0 12 12">${MARKS[mark](colours)}</svg>`)}`;

const LOWERED = '₀₁₂₃₄₅₆₇₈₉';
/** Counts of a formula as lowered digits: a canvas has no markup. */
export const loweredCounts = (formula: string): string => formula.replace(/\d/g, (digit) => LOWERED[Number(digit)]);

const MONO = 'IBM Plex Mono, monospace';

/** Cytoscape's style sheet in the colours of the page: measured edges heavy and solid, inferred thin and dashed. */
export function graphStyle(colours: GraphColours): StylesheetJson {
  const text = { 'font-family': MONO, color: colours.ink, 'text-wrap': 'wrap' as const };
  return [
    {
      selector: 'node',
      style: {
        ...text,
        ...{ shape: 'rectangle', width: 98, height: 30, label: 'data(label)', 'font-size': 12, 'line-height': 1.15 },
        ...{ 'text-valign': 'center', 'text-halign': 'center', 'background-color': colours.sheet, 'border-width': 0 },
        ...{ 'background-image': 'data(image)', 'background-width': '12px', 'background-height': '12px' },
        ...{ 'background-position-x': '1px', 'background-position-y': '50%', 'background-clip': 'none' }
      }
    },
    { selector: 'node[mark = "unseen"]', style: { color: colours.ink2, 'font-style': 'italic' } },
    { selector: 'node.selected', style: { 'background-color': colours.wash } },
    {
      selector: 'edge',
      style: {
        ...text,
        ...{ 'curve-style': 'unbundled-bezier', 'control-point-distances': 'data(bend)' as never },
        ...{ 'control-point-weights': [0.25, 0.75], 'source-endpoint': 'outside-to-node' },
        // Beside the line and near the ion it leads to: a label on the line would make a solid one look broken.
        ...{ 'target-label': 'data(label)', 'target-text-offset': 'data(along)' as never },
        ...{ 'target-text-margin-x': 'data(aside)' as never, 'target-text-margin-y': 'data(above)' as never },
        ...{ 'font-size': 10, color: colours.ink2, 'target-arrow-shape': 'none' },
        ...{ 'text-background-color': colours.sheet, 'text-background-opacity': 1, 'text-background-padding': '2px' }
      }
    },
    { selector: 'edge[?measured]', style: { width: 2.2, 'line-color': colours.ink, 'line-style': 'solid' } },
    {
      selector: 'edge[!measured]',
      style: { width: 1, 'line-color': colours.ink2, 'line-style': 'dashed', 'line-dash-pattern': [4, 3] }
    },
    { selector: 'edge[!primary]', style: { 'target-label': '', opacity: 0.45, 'z-index': 0 } }
  ];
}
