import mono from '@fontsource/ibm-plex-mono/files/ibm-plex-mono-latin-400-normal.woff2?url';
import sans from '@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-400-normal.woff2?url';

async function dataUrl(address: string): Promise<string> {
  const response = await fetch(address);
  if (!response.ok) throw new Error('The fonts of the figure could not be loaded. Try again.');
  const bytes = new Uint8Array(await response.arrayBuffer());
  let text = '';
  for (const byte of bytes) text += String.fromCharCode(byte);
  return `data:font/woff2;base64,${btoa(text)}`;
}

/** A picture sees no fonts of its page, so they travel inside it. */
async function withFonts(svg: string): Promise<string> {
  const [monoData, sansData] = await Promise.all([dataUrl(mono), dataUrl(sans)]);
  const face = (family: string, data: string) => `@font-face{font-family:'${family}';src:url(${data}) format('woff2')}`;
  const style = `<style>${face('IBM Plex Mono', monoData)}${face('IBM Plex Sans', sansData)}</style>`;
  return svg.replace(/(<svg[^>]*>)/, `$1${style}`);
}

/** Longest side in px that browsers draw reliably. */
const MAX_SIDE = 12_000;

/**
 * Draws a figure as PNG in the browser.
 * @param svg text with width and height in px
 * @param scale px of the picture to one of the figure; 3 prints at 300 dpi on a page
 * @throws Error when the picture cannot be drawn
 */
export async function svgToPng(svg: string, scale = 3): Promise<Blob> {
  const size = /width="([\d.]+)" height="([\d.]+)"/.exec(svg);
  if (!size) throw new Error('The figure has no size.');
  const [width, height] = [Number(size[1]), Number(size[2])];
  const factor = Math.min(scale, MAX_SIDE / Math.max(width, height));
  const image = new Image();
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(await withFonts(svg))}`;
  await image.decode();
  const canvas = document.createElement('canvas');
  canvas.width = Math.round(width * factor);
  canvas.height = Math.round(height * factor);
  const context = canvas.getContext('2d');
  if (!context) throw new Error('This browser draws no pictures.');
  context.drawImage(image, 0, 0, canvas.width, canvas.height);
  const blob = await new Promise<Blob | null>((resolve) => canvas.toBlob(resolve, 'image/png'));
  if (!blob) throw new Error('The picture is too large for this browser. Take the SVG.');
  return blob;
}

/** Hands a file to the reader. */
export function save(blob: Blob, name: string): void {
  const link = document.createElement('a');
  link.href = URL.createObjectURL(blob);
  link.download = name;
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 10_000);
}
