/** The quick ways of reading give the very same as the XML parser, on whole files and on damaged ones. */
import { describe, expect, it } from 'vitest';
import { fixtures } from '../../../../tests/fuzz/fixtures';
import { mutated } from '../../../../tests/fuzz/mutate';
import { outcomeOf } from '../../../../tests/fuzz/outcome';
import { Random } from '../../../../tests/fuzz/random';

const files = [...fixtures()];
const CASES = 150;

describe('quick reading', () => {
  it.each(files)('gives the same as the XML parser: %s', async (_name, bytes) => {
    const slow = await outcomeOf(bytes, { quick: false });
    expect(slow.events.at(-1)?.kind).toBe('end');
    for (const size of [1 << 16, 1000, 7]) expect(await outcomeOf(bytes, {}, size)).toEqual(slow);
  });

  it.each(files)(
    'gives the same as the XML parser on damaged forms: %s',
    async (name, bytes) => {
      let read = 0;
      for (let seed = 0; seed < CASES; seed++) {
        const random = new Random(seed);
        const damaged = mutated(bytes, random, random.pick(files)[1]);
        const size = 1 + random.below(4000);
        const slow = await outcomeOf(damaged, { quick: false }, size);
        if (slow.error === null) read++;
        expect(await outcomeOf(damaged, {}, size), `${name}, seed ${seed}`).toEqual(slow);
      }
      // Damage that makes every file unreadable would prove nothing.
      expect(read).toBeGreaterThan(CASES / 4);
    },
    60_000
  );
});
