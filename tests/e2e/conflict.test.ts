import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { inventedFile, mzText } from './support/invented-run';
import { buildOnlyTree, inspector, ionRow, openTree, selectIon, uploadRun } from './support/pages';
import { openWorld, type World } from './support/world';

let world: World;
let first: Page;
let second: Page;

beforeAll(async () => {
  world = await openWorld();
  first = await world.as(world.people.annotator);
  await uploadRun(first, world.study, 'fraction-7.mzML', inventedFile());
  const tree = await buildOnlyTree(first);
  second = await world.as(world.people.lead);
  await openTree(second, tree);
});
afterAll(() => world?.close());

const trouble = (page: Page) => page.getByRole('alert').filter({ hasText: 'look again' });
const press = (page: Page, act: 'Confirm' | 'Reject') =>
  inspector(page).getByRole('button', { name: act, exact: true }).click();

/** Both look at the same ion in the same state; nobody may learn of the other's act by chance. */
async function bothLookAt(formula: string): Promise<void> {
  await second.reload();
  await Promise.all([first, second].map((page) => selectIon(page, mzText(formula))));
}

describe('two people who decide on the same claim', () => {
  it('the second sees who was first with what, and the first decision stands', async () => {
    const mz = mzText('C16H16NO3');
    await bothLookAt('C16H16NO3');
    await press(first, 'Confirm');
    await ionRow(first, mz).filter({ hasText: 'confirmed' }).waitFor();
    await press(second, 'Reject');
    const said = await trouble(second).innerText();
    expect(said).toContain(`annotator confirmed C16H16NO3 on this ion just now (m/z ${mz}) – look again.`);
    expect(said).toContain('Nothing of yours was saved.');
    await ionRow(second, mz).filter({ hasText: 'confirmed' }).waitFor();
    await inspector(second).getByText('confirmed by annotator').waitFor();
    await second.getByRole('button', { name: 'Close' }).first().click();
    await trouble(second).waitFor({ state: 'detached' });
  });

  it('having looked again, the second may decide otherwise, and the history names both', async () => {
    const mz = mzText('C16H16NO3');
    await press(second, 'Reject');
    await ionRow(second, mz).filter({ hasText: 'rejected' }).waitFor();
    const history = inspector(second).locator('section').filter({ hasText: 'History' }).last();
    await history.getByText('lead rejected').waitFor();
    expect(await history.innerText()).toMatch(/annotator\s+confirmed/);
    expect(await trouble(second).count()).toBe(0);
  });

  it('in the same moment: one of them wins, the other is told, both then see the same', async () => {
    const mz = mzText('C9H12NO2');
    await bothLookAt('C9H12NO2');
    const statuses = await Promise.all(
      [first, second].map(async (page, i) => {
        const answer = page.waitForResponse((response) => response.url().endsWith('/claims'));
        await press(page, i === 0 ? 'Confirm' : 'Reject');
        return (await answer).status();
      })
    );
    expect([...statuses].sort()).toEqual([200, 409]);
    const loser = statuses[0] === 409 ? first : second;
    const state = statuses[0] === 409 ? 'rejected' : 'confirmed';
    await trouble(loser).waitFor();
    await first.reload();
    for (const page of [first, second]) await ionRow(page, mz).filter({ hasText: state }).waitFor();
  });
});

it('no page threw an error of its own', () => {
  expect(world.scriptErrors).toEqual([]);
});
