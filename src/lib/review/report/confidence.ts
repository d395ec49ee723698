/**
 * Confidence levels of an identification in words of our own, after Schymanski et al. 2014,
 * Environ. Sci. Technol. 48, 2097, doi 10.1021/es5002105.
 */
export const LEVELS: Readonly<Record<string, string>> = {
  '1': 'structure confirmed with a reference standard',
  '2a': 'probable structure by an unambiguous library spectrum',
  '2b': 'probable structure by diagnostic evidence: only one structure fits',
  '3': 'tentative candidates: a class or several structures fit',
  '4': 'molecular formula without a structure',
  '5': 'm/z of interest only'
};

/** Highest level that a fragmentation tree alone can carry. */
export const HIGHEST = '2b';

export interface Confidence {
  /** level printed, null when none is claimed. */
  level: string | null;
  text: string;
  note: string | null;
}

export const CITATION = 'Schymanski et al. 2014, Environ. Sci. Technol. 48, 2097';

/**
 * What the report may claim. A tree holds neither a reference standard nor a library match, so levels 1 and 2a are
 * printed as 2b with a note; without any claim only a formula or an m/z stands.
 */
export function claimedConfidence(stated: string | null): Confidence {
  if (stated === null || !(stated in LEVELS))
    return { level: null, text: 'No confidence level was claimed.', note: null };
  const capped = stated === '1' || stated === '2a';
  const level = capped ? HIGHEST : stated;
  return {
    level,
    text: `Level ${level}, ${LEVELS[level]} (${CITATION}). A fragmentation tree alone carries level ${HIGHEST} at most.`,
    note: capped
      ? `Level ${stated} was stated; it needs ${stated === '1' ? 'a reference standard' : 'a library spectrum'}, which is no part of this tree.`
      : null
  };
}
