import { inflateSync } from 'node:zlib';

interface Table {
  tag: number;
  offset: number;
  packed: number;
  length: number;
  checksum: number;
}

const align = (n: number): number => (n + 3) & ~3;

function tablesOf(woff: Buffer): Table[] {
  return Array.from({ length: woff.readUInt16BE(12) }, (_, i) => {
    const at = 44 + i * 20;
    return {
      tag: woff.readUInt32BE(at),
      offset: woff.readUInt32BE(at + 4),
      packed: woff.readUInt32BE(at + 8),
      length: woff.readUInt32BE(at + 12),
      checksum: woff.readUInt32BE(at + 16)
    };
  });
}

/**
 * Unpacks a WOFF 1.0 font (W3C Recommendation, 2012) to the sfnt it holds. The typesetter would unpack it in JavaScript
 * for every document, which takes longer than setting a page.
 * @throws RangeError when the bytes are no WOFF file
 */
export function unpackWoff(woff: Buffer): Buffer {
  if (woff.length < 44 || woff.toString('latin1', 0, 4) !== 'wOFF') throw new RangeError('not a WOFF font file');
  const tables = tablesOf(woff);
  const head = 12 + tables.length * 16;
  const out = Buffer.alloc(tables.reduce((size, table) => size + align(table.length), head));
  const power = 2 ** Math.floor(Math.log2(tables.length));
  out.writeUInt32BE(woff.readUInt32BE(4), 0);
  [tables.length, power * 16, Math.log2(power), (tables.length - power) * 16].forEach((v, i) =>
    out.writeUInt16BE(v, 4 + i * 2)
  );
  let at = head;
  tables.forEach(({ tag, offset, packed, length, checksum }, i) => {
    [tag, checksum, at, length].forEach((value, k) => out.writeUInt32BE(value, 12 + i * 16 + k * 4));
    const stored = woff.subarray(offset, offset + packed);
    (packed < length ? inflateSync(stored) : stored).copy(out, at);
    at += align(length);
  });
  return out;
}
