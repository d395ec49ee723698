import { closeDatabase, database } from '$lib/server/db';
import { ions, runs, studies, trees } from '$lib/server/db/schema';
import { and, desc, eq } from 'drizzle-orm';
import type { BrowserContext, Page } from 'playwright-core';
import type { Product } from '../../helpers/server';

/** Addresses of the demo's things. */
export interface Places {
  study: string;
  run: string;
  group: string;
  draft: string;
  inReview: string;
  approved: string;
  shared: string;
  /** ?ion=… of a strong ion */
  ionInReview: string;
  ionDraft: string;
}

export interface Screen {
  /** of the file */
  name: string;
  as: 'stranger' | 'annotator' | 'reviewer' | 'lead' | 'guest';
  path: (places: Places) => string;
  /** what is done before the picture is taken */
  then?: (page: Page) => Promise<void>;
}

/** Makes a shared link through the screen and looks the rest up. */
export async function findPlaces(lead: BrowserContext, product: Product): Promise<Places> {
  Object.assign(process.env, product.env);
  const all = await database().select().from(trees);
  const allRuns = await database().select().from(runs);
  const [study] = await database().select().from(studies);
  const tree = (status: string) => {
    const row = all.find((found) => found.status === status);
    if (!row) throw new Error(`the demo has no tree that is ${status}`);
    return { id: row.id, path: `/studies/${row.studyId}/trees/${row.id}`, row };
  };
  const approved = tree('approved');
  const strongIon = async (status: string) => {
    const [ion] = await database()
      .select({ id: ions.id })
      .from(ions)
      .where(and(eq(ions.treeId, tree(status).id), eq(ions.isPrecursor, false), eq(ions.spectrum, 0)))
      .orderBy(desc(ions.intensity));
    return `?ion=${ion.id}`;
  };
  const [ionInReview, ionDraft] = [await strongIon('in-review'), await strongIon('draft')];
  await closeDatabase();
  const page = await lead.newPage();
  await page.goto(`${approved.path}/report`);
  await page.getByRole('button', { name: 'Make a link' }).click();
  const shared = await page.getByRole('textbox', { name: /link/i }).inputValue();
  await page.close();
  return {
    study: `/studies/${approved.row.studyId}`,
    run: `/studies/${allRuns[0].studyId}/runs/${allRuns[0].id}`,
    group: `/settings/${study.groupId}`,
    draft: tree('draft').path,
    inReview: tree('in-review').path,
    approved: approved.path,
    shared: new URL(shared).pathname,
    ...{ ionInReview, ionDraft }
  };
}

const graphDrawn = (page: Page) => page.waitForTimeout(1500);

export const SCREENS: readonly Screen[] = [
  { name: 'sign-in', as: 'stranger', path: () => '/sign-in' },
  {
    ...{ name: 'sign-in-refused', as: 'stranger', path: () => '/sign-in' },
    then: async (page) => {
      await page.getByLabel('E-mail address').fill('somebody@rivenmark.invalid');
      await page.getByLabel('Password').fill('not the right one');
      await page.getByRole('button', { name: 'Sign in' }).click();
      await page.getByRole('alert').waitFor();
    }
  },
  { name: 'forgot', as: 'stranger', path: () => '/forgot' },
  { name: 'invitation-gone', as: 'stranger', path: () => `/invitation?token=${'A'.repeat(43)}` },
  { name: 'reset-gone', as: 'stranger', path: () => `/reset?token=${'A'.repeat(43)}` },
  { name: 'shared', as: 'stranger', path: (p) => p.shared },
  { name: 'mail', as: 'stranger', path: () => '/dev/mail' },
  { name: 'desk-annotator', as: 'annotator', path: () => '/' },
  { name: 'desk-reviewer', as: 'reviewer', path: () => '/' },
  { name: 'desk-lead', as: 'lead', path: () => '/' },
  { name: 'desk-guest', as: 'guest', path: () => '/' },
  { name: 'studies', as: 'annotator', path: () => '/studies' },
  {
    ...{ name: 'study-new', as: 'annotator', path: () => '/studies' },
    then: (page) => page.getByRole('button', { name: 'New study' }).click()
  },
  { name: 'study-trees', as: 'annotator', path: (p) => p.study },
  { name: 'study-runs', as: 'annotator', path: (p) => `${p.study}/runs` },
  { name: 'study-members', as: 'lead', path: (p) => `${p.study}/members` },
  { name: 'run', as: 'annotator', path: (p) => p.run },
  { name: 'workbench', as: 'annotator', path: (p) => p.inReview, then: graphDrawn },
  { name: 'workbench-approved', as: 'reviewer', path: (p) => p.approved, then: graphDrawn },
  { name: 'workbench-ion', as: 'annotator', path: (p) => p.inReview + p.ionInReview, then: graphDrawn },
  { name: 'workbench-draft-ion', as: 'annotator', path: (p) => p.draft + p.ionDraft, then: graphDrawn },
  { name: 'workbench-spectrum', as: 'annotator', path: (p) => `${p.inReview}?spectrum=1`, then: graphDrawn },
  {
    ...{ name: 'workbench-settings', as: 'annotator', path: (p) => p.draft },
    then: (page) => page.getByRole('button', { name: 'Settings' }).click()
  },
  {
    ...{ name: 'workbench-keys', as: 'annotator', path: (p) => p.draft },
    then: (page) => page.keyboard.press('?')
  },
  { name: 'workbench-guest', as: 'guest', path: (p) => p.approved, then: graphDrawn },
  { name: 'review-reviewer', as: 'reviewer', path: (p) => `${p.inReview}/review` },
  { name: 'review-annotator', as: 'annotator', path: (p) => `${p.inReview}/review` },
  { name: 'review-draft', as: 'annotator', path: (p) => `${p.draft}/review` },
  { name: 'review-approved', as: 'annotator', path: (p) => `${p.approved}/review` },
  { name: 'report-approved', as: 'lead', path: (p) => `${p.approved}/report` },
  { name: 'report-draft', as: 'annotator', path: (p) => `${p.inReview}/report` },
  { name: 'groups', as: 'lead', path: () => '/settings' },
  { name: 'group-members', as: 'lead', path: (p) => p.group },
  { name: 'group-invitations', as: 'lead', path: (p) => `${p.group}/invitations` },
  { name: 'group-defaults', as: 'lead', path: (p) => `${p.group}/defaults` },
  { name: 'group-defaults-reader', as: 'annotator', path: (p) => `${p.group}/defaults` },
  { name: 'group-audit', as: 'lead', path: (p) => `${p.group}/audit` },
  { name: 'forbidden', as: 'guest', path: (p) => `${p.group}/audit` },
  { name: 'account', as: 'annotator', path: () => '/account' },
  { name: 'about', as: 'stranger', path: () => '/about' },
  { name: 'nothing-here', as: 'annotator', path: () => '/studies/nothing-here' }
];
