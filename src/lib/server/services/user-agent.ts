const BROWSERS: [RegExp, string][] = [
  [/\bEdgA?\//, 'Edge'],
  [/\bOPR\//, 'Opera'],
  [/\b(?:Firefox|FxiOS)\//, 'Firefox'],
  [/\bHeadlessChrome\//, 'Chrome without a window'],
  [/\b(?:Chrome|CriOS|Chromium)\//, 'Chrome'],
  [/\bVersion\/[\d.]+ .*Safari\//, 'Safari'],
  [/^(?:curl|Wget|node|python)/i, 'A program']
];
const SYSTEMS: [RegExp, string][] = [
  [/\b(?:iPhone|iPad)\b/, 'iOS'],
  [/\bAndroid\b/, 'Android'],
  [/\bWindows\b/, 'Windows'],
  [/\bMac OS X\b|\bMacintosh\b/, 'macOS'],
  [/\bCrOS\b/, 'ChromeOS'],
  [/\bLinux\b/, 'Linux']
];
const first = (text: string, table: [RegExp, string][]) => table.find(([pattern]) => pattern.test(text))?.[1];

/** A User-Agent header in words, such as "Firefox on Linux". */
export function userAgentInWords(header: string): string {
  const browser = first(header, BROWSERS);
  const system = first(header, SYSTEMS);
  if (browser && system) return `${browser} on ${system}`;
  return browser ?? (system ? `A browser on ${system}` : 'An unknown browser');
}
