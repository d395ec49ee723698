const HERE = 'http://here.invalid';

/**
 * Where to go after signing in: a path of this site, never another site.
 * @param next what stands in the address or form; anything doubtful gives `fallback`
 */
export function ownPath(next: string | null | undefined, fallback = '/'): string {
  if (!next || next.length > 2000 || !next.startsWith('/') || /[\p{Cc}\\]/u.test(next)) return fallback;
  try {
    const url = new URL(next, HERE);
    // Normalising can bring a second slash to the front ("/.//site"), which a browser reads as another site.
    if (url.origin !== HERE || url.pathname.startsWith('//')) return fallback;
    return url.pathname + url.search + url.hash;
  } catch {
    return fallback;
  }
}
