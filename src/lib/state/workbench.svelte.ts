import type { Domain } from '$lib/components/spectrum/axis';
import { NOTHING_SELECTED, readSelection, writeSelection, type Selection } from './selection';
import type { IonItem } from './ion-rows';

/** Selection of the workbench. One place for all pictures; every change is written to the address at once. */
export class WorkbenchState {
  selection: Selection = $state({ ...NOTHING_SELECTED });

  /** @param write puts a query ('' or "?…") into the address without navigating */
  constructor(
    query: URLSearchParams,
    private readonly write: (query: string) => void
  ) {
    this.selection = readSelection(query);
  }

  private change(part: Partial<Selection>) {
    this.selection = { ...this.selection, ...part };
    this.write(writeSelection(this.selection, location.search));
  }

  /** Takes over the address after the person went back or forth. */
  read(query: URLSearchParams) {
    this.selection = readSelection(query);
  }

  ion(ion: Pick<IonItem, 'id' | 'spectrum' | 'mz'>) {
    const { zoom } = this.selection;
    const outside = zoom && (ion.mz < zoom.from || ion.mz > zoom.to);
    const span = zoom ? zoom.to - zoom.from : 0;
    this.change({
      ion: ion.id,
      spectrum: ion.spectrum,
      ...(outside ? { zoom: { from: Math.max(0, ion.mz - span / 2), to: ion.mz + span / 2 } } : {})
    });
  }

  spectrum(index: number) {
    this.change({ ion: null, spectrum: index });
  }

  /** The tree as a whole. */
  nothing() {
    this.change({ ion: null, spectrum: null });
  }

  lane(lane: Selection['lane']) {
    this.change({ lane });
  }

  zoom(zoom: Domain | null) {
    this.change({ zoom });
  }
}
