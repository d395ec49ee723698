/** Footer of every report, and of the page about the product: what such a result is and is not. */
export const CAUTION =
  'A formula from accurate mass is a proposal; a fragmentation tree supports a structure and does not prove it. ' +
  "Results that bear on health, safety, forensics or release testing need the reader's own validated method, local " +
  'rules and licensed practice.';
