import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';
import pdfmake from 'pdfmake';
import type { TDocumentDefinitions } from 'pdfmake/interfaces';
import { MONO, SANS } from './pdf-text';
import { unpackWoff } from './woff';

/** The package's in-memory files, which its types leave out. */
interface VirtualFiles {
  virtualfs: { writeFileSync(name: string, content: Buffer): void };
}

/** File of each style, and the end of the font's PostScript name. */
const STYLES = {
  normal: ['Regular', ''],
  bold: ['SemiBold', '-SmBld'],
  italics: ['Italic', '-Italic'],
  bolditalics: ['SemiBoldItalic', '-SmBldItalic']
} as const;
const require = createRequire(import.meta.url);

/**
 * A family of our own packages; the complete faces hold the lowered digits that the web subsets lack. Each in-memory
 * file bears the PostScript name of its font: figures look a font up by that name among those already open.
 */
function family(name: 'Mono' | 'Sans'): Record<string, string> {
  const folder = dirname(require.resolve(`@ibm/plex-${name.toLowerCase()}/package.json`));
  const { virtualfs } = pdfmake as typeof pdfmake & VirtualFiles;
  return Object.fromEntries(
    Object.entries(STYLES).map(([key, [style, end]]) => {
      const path = join(folder, 'fonts/complete/woff', `IBMPlex${name}-${style}.woff`);
      virtualfs.writeFileSync(`IBMPlex${name}${end}`, unpackWoff(readFileSync(path)));
      return [key, `IBMPlex${name}${end}`];
    })
  );
}

let ready = false;

/** Fonts from memory; nothing that a document names can make the server read a file or an address. */
function prepare(): void {
  if (ready) return;
  pdfmake.setFonts({ [SANS]: family('Sans'), [MONO]: family('Mono') });
  pdfmake.setUrlAccessPolicy(() => false);
  pdfmake.setLocalAccessPolicy(() => false);
  ready = true;
}

/** Typesets a document; figures stay vector, fonts are embedded as subsets. */
export async function renderPdf(document: TDocumentDefinitions): Promise<Buffer> {
  prepare();
  return pdfmake.createPdf(document).getBuffer();
}
