import type { IonItem } from '$lib/state/ion-rows';
import { panDomain, zoomDomain, type Domain } from './axis';

/** The range after a key that zooms or pans; null shows everything, undefined: the key means something else. */
export function domainAfterKey(event: KeyboardEvent, domain: Domain, whole: Domain, about: number | null) {
  const centre = about !== null && about > domain.from && about < domain.to ? about : (domain.from + domain.to) / 2;
  if (event.key === '+' || event.key === '=') return zoomDomain(domain, whole, 0.6, centre);
  if (event.key === '-' || event.key === '_') return zoomDomain(domain, whole, 1 / 0.6, centre);
  if (event.key === '0') return null;
  if (event.shiftKey && event.key === 'ArrowLeft') return panDomain(domain, whole, -0.2);
  if (event.shiftKey && event.key === 'ArrowRight') return panDomain(domain, whole, 0.2);
  return undefined;
}

/** The neighbour of an ion in its lane (sorted by m/z); without one, the strongest of the lane. */
export function neighbour(ions: readonly IonItem[], id: number | null, step: 1 | -1): IonItem | null {
  const at = ions.findIndex((ion) => ion.id === id);
  if (at < 0) return ions.reduce<IonItem | null>((top, ion) => (!top || ion.relative > top.relative ? ion : top), null);
  return ions[at + step] ?? null;
}

/** The ion of another lane nearest to an m/z. */
export function nearestTo(ions: readonly IonItem[], mz: number): IonItem | null {
  return ions.reduce<IonItem | null>(
    (best, ion) => (!best || Math.abs(ion.mz - mz) < Math.abs(best.mz - mz) ? ion : best),
    null
  );
}
