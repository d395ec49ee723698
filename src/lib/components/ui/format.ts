/** m/z with four decimals for high-resolution data, one for unit resolution. */
export const mzText = (mz: number, decimals = 4): string => mz.toFixed(decimals);

/** Signed ppm with one decimal and a true minus sign. */
export function ppmText(ppm: number | null): string {
  if (ppm === null) return '';
  const text = Math.abs(ppm).toFixed(1);
  return text === '0.0' ? '0.0' : `${ppm < 0 ? '−' : '+'}${text}`;
}

/** Share 0..1 as "91.4 %". */
export const percentText = (share: number, decimals = 1): string => `${(share * 100).toFixed(decimals)} %`;

/** "12.4 MB" in decimal megabytes. */
export function bytesText(bytes: number): string {
  if (bytes < 1000) return `${bytes} B`;
  if (bytes < 1e6) return `${(bytes / 1e3).toFixed(1)} kB`;
  return bytes < 1e9 ? `${(bytes / 1e6).toFixed(1)} MB` : `${(bytes / 1e9).toFixed(2)} GB`;
}

const day = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', year: 'numeric' });
const time = new Intl.DateTimeFormat('en-GB', { hour: '2-digit', minute: '2-digit' });

/** "3 Dec 2026, 14:05" in the reader's time zone. */
export function dateTimeText(at: Date | string | null): string {
  if (!at) return '';
  const date = new Date(at);
  return `${day.format(date)}, ${time.format(date)}`;
}

/** Plural by count: plural(1, 'scan') = "1 scan", plural(3, 'scan') = "3 scans". */
export const plural = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`;
