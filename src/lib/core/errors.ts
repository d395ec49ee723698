/** Where in a file something went wrong; fields are null when they cannot be known. */
export interface FilePlace {
  /** byte offset in the uncompressed stream. */
  byte: number | null;
  /** native id of the scan. */
  scan: string | null;
}

export type CoreErrorCode =
  | 'not-mzml'
  | 'empty'
  | 'truncated'
  | 'doctype'
  | 'unsupported-version'
  | 'unsupported-compression'
  | 'bad-base64'
  | 'bad-array'
  | 'bad-number'
  | 'inflate-limit'
  | 'limit'
  | 'no-spectra'
  | 'xml'
  | 'bad-formula'
  | 'bad-elements'
  | 'bad-adduct'
  | 'cancelled'
  | 'too-many-candidates';

/** Typed error of the core: says what, where, and (through `cure`) what a person can do about it. */
export class CoreError extends Error {
  constructor(
    readonly code: CoreErrorCode,
    message: string,
    readonly place: FilePlace = { byte: null, scan: null },
    readonly cure: string | null = null
  ) {
    super(message);
    this.name = 'CoreError';
  }
}
