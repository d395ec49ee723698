/**
 * Vectors of the unit tests in the MS-Numpress reference repository (ms-numpress/ms-numpress, Apache-2.0), which belongs
 * to Teleman et al., Mol. Cell. Proteomics 13, 1537 (2014).
 */
import { describe, expect, it } from 'vitest';
import { CoreError } from '$lib/core/errors';
import { decodeLinear, decodePic, decodeSlof } from '$lib/core/mzml/numpress';
import { readText, mzmlText, plainArray } from '../helpers/mzml-text';

const bytes = (hex: string) => Uint8Array.from(Buffer.from(hex.replaceAll(' ', ''), 'hex'));

describe('linear prediction', () => {
  it('decodes the published array of four m/z', () => {
    const values = decodeLinear(bytes('40f86a0000000000 80969800 002d3101 7580'));
    expect([...values].map((value) => Number(value.toFixed(5)))).toEqual([100, 200, 300.00005, 400.0001]);
  });

  it('decodes equal steps', () => {
    expect([...decodeLinear(bytes('40f86a0000000000 80969800 201d9a00 88'))]).toEqual([100, 101, 102, 103]);
  });

  it('holds none in 8 bytes and one value in 12', () => {
    expect(decodeLinear(bytes('40f86a0000000000'))).toHaveLength(0);
    expect([...decodeLinear(bytes('40f86a0000000000 80969800'))]).toEqual([100]);
  });

  it.each([1, 7, 9, 11, 13, 15])('refuses %i bytes', (length) => {
    expect(() => decodeLinear(bytes('40f86a0000000000 80969800 201d9a00 88').subarray(0, length))).toThrow(CoreError);
  });
});

describe('positive integers', () => {
  it('decodes the published 6 bytes', () => {
    expect([...decodePic(bytes('646656666676'))]).toEqual([100, 101, 102, 103]);
  });

  it('decodes the published half-byte stream of 5, 0, 1, 370000000', () => {
    expect([...decodePic(bytes('7587 1008 0cd0 61'))]).toEqual([5, 0, 1, 370000000]);
  });

  it('refuses the published corrupt array', () => {
    expect(() => decodePic(bytes(`64668c5c215091${'00'.repeat(25)}`))).toThrow(/corrupt/);
  });
});

describe('short logged floats', () => {
  it('decodes the published 16 bytes to within 1', () => {
    const values = decodeSlof(bytes('40c3880000000000 47b4 29cf efde 24ea'));
    [100, 200, 300.00005, 400.0001].forEach((wanted, i) => expect(Math.abs(values[i] - wanted)).toBeLessThan(1));
  });
});

describe('in a file', () => {
  const mz = 'QPhqAAAAAACAlpgAIB2aAIg=';
  const intensity = plainArray('intensity', [1, 2, 3, 4]);

  it.each([
    ['alone', ['MS:1002312'], mz],
    ['followed by zlib', ['MS:1002746'], Buffer.from(mz, 'base64')],
    ['as two terms on one array', ['MS:1000574', 'MS:1002312'], Buffer.from(mz, 'base64')]
  ])('reads linear %s', async (_name, terms, data) => {
    const { deflateSync } = await import('node:zlib');
    const text = typeof data === 'string' ? data : deflateSync(data).toString('base64');
    const array = { terms: ['MS:1000521', 'MS:1000514', ...terms], text };
    const { scans } = await readText(mzmlText([{ length: 4, arrays: [array, intensity] }]));
    expect([...scans[0].peaks.mz]).toEqual([100, 101, 102, 103]);
  });

  const forms = [
    { name: 'pic', alone: 'MS:1002313', zlib: 'MS:1002747', data: 'ZGZWZmZ2', values: [100, 101, 102, 103], within: 0 },
    {
      name: 'slof',
      alone: 'MS:1002314',
      zlib: 'MS:1002748',
      data: 'QMOIAAAAAABHtCnP794k6g==',
      values: [100, 200, 300.00005, 400.0001],
      within: 1
    }
  ];

  it.each(forms)('reads $name as intensities, alone, followed by zlib and as two terms', async (form) => {
    const { deflateSync } = await import('node:zlib');
    const zlibbed = deflateSync(Buffer.from(form.data, 'base64')).toString('base64');
    for (const [terms, text] of [
      [[form.alone], form.data],
      [[form.zlib], zlibbed],
      [[form.alone, 'MS:1000574'], zlibbed]
    ] as const) {
      const array = { terms: ['MS:1000521', 'MS:1000515', ...terms], text };
      const { scans } = await readText(mzmlText([{ length: 4, arrays: [plainArray('mz', [1, 2, 3, 4]), array] }]));
      const { intensity } = scans[0].peaks;
      expect(intensity).toHaveLength(4);
      form.values.forEach((value, k) => expect(Math.abs(intensity[k] - value)).toBeLessThanOrEqual(form.within));
    }
  });

  it.each(['MS:1003780', 'MS:1003784', 'MS:1003089'])(
    'names the compression %s, which it cannot read',
    async (term) => {
      const array = { terms: ['MS:1000523', 'MS:1000514', term], text: mz };
      await expect(readText(mzmlText([{ length: 4, arrays: [array, intensity] }]))).rejects.toMatchObject({
        code: 'unsupported-compression',
        message: expect.stringContaining(term)
      });
    }
  );
});
