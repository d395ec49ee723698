/**
 * The same text in memory of its own. An engine may keep a piece of a text as a view of the whole; a native id that
 * somebody keeps would then keep all the XML it was cut from.
 */
export function detached(text: string): string {
  return ` ${text}`.slice(1);
}
