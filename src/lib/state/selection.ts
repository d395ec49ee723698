/** What is selected and shown; all of it lives in the URL, so that a colleague can be sent exactly there. */
export interface Selection {
  /** id of the selected ion */
  ion: number | null;
  /** index of the selected spectrum; with an ion it is the ion's own */
  spectrum: number | null;
  /** the ion table shows the selected lane, or the whole tree */
  lane: 'selected' | 'all';
  /** zoom of the m/z axis; null shows everything */
  zoom: { from: number; to: number } | null;
}

export const NOTHING_SELECTED: Selection = { ion: null, spectrum: null, lane: 'selected', zoom: null };

function number(text: string | null): number | null {
  if (text === null || text.trim() === '') return null;
  const value = Number(text);
  return Number.isFinite(value) ? value : null;
}
function whole(text: string | null, least: number): number | null {
  const value = number(text);
  return value !== null && Number.isInteger(value) && value >= least ? value : null;
}

/** Reads a selection from the query of the address; what makes no sense is left out. */
export function readSelection(query: URLSearchParams): Selection {
  const from = number(query.get('from'));
  const to = number(query.get('to'));
  return {
    ion: whole(query.get('ion'), 1),
    spectrum: whole(query.get('spectrum'), 0),
    lane: query.get('lane') === 'all' ? 'all' : 'selected',
    zoom: from !== null && to !== null && from >= 0 && to > from ? { from, to } : null
  };
}

/** Writes a selection into the query of an address; other parameters stay. @returns the query with "?", or '' when it is empty */
export function writeSelection(selection: Selection, search: string): string {
  const next = new URLSearchParams(search);
  const put = (name: string, value: string | null) => (value === null ? next.delete(name) : next.set(name, value));
  put('ion', selection.ion === null ? null : String(selection.ion));
  put('spectrum', selection.ion !== null || selection.spectrum === null ? null : String(selection.spectrum));
  put('lane', selection.lane === 'all' ? 'all' : null);
  put('from', selection.zoom ? selection.zoom.from.toFixed(3) : null);
  put('to', selection.zoom ? selection.zoom.to.toFixed(3) : null);
  const text = next.toString();
  return text ? `?${text}` : '';
}
