import type { Ask, Outcome } from './ask';
import type { ActorName, Estate, World } from './world';

/** Who gets in. Other members of the group are forbidden; outsiders are told that there is no such thing. */
type Members = readonly ActorName[];
const EVERYBODY: Members = ['guest', 'reviewer', 'annotator', 'lead'];
const TEAM: Members = ['reviewer', 'annotator', 'lead'];
const ANNOTATORS: Members = ['annotator', 'lead'];
const LEAD: Members = ['lead'];
/** Whoever is signed in, for themselves alone. */
const SIGNED_IN = 'signed in';

export interface Row {
  /** what a request can start, as tests/unit/support/guards.ts names it */
  entry: string;
  may: Members | typeof SIGNED_IN;
  /** belongs to the group itself: its guest without this study knows of it and is refused */
  ofGroup?: boolean;
  /** what those who may are told, where the request names a thing that is not there; else they get in */
  granted?: Outcome;
  /** what members who may not are told; else that it is forbidden */
  refused?: Outcome;
  ask: (estate: Estate, world: World) => Ask;
}

const APP = 'src/routes/(app)';
const STUDY = `${APP}/studies/[study]`;
const TREE = `${STUDY}/trees/[tree]`;
const GROUP = `${APP}/settings/[group]`;

type Path = (e: Estate, w: World) => string;
type Fields = (e: Estate, w: World) => Record<string, string | string[]>;

const page = (folder: string, may: Row['may'], path: Path, more: Partial<Row> = {}): Row => ({
  ...{ entry: `${folder}/+page.server.ts load`, may },
  ask: (e, w) => ({ method: 'GET', path: path(e, w) }),
  ...more
});
const form = (
  folder: string,
  name: string,
  may: Row['may'],
  path: Path,
  fields: Fields,
  more: Partial<Row> = {}
): Row => ({
  ...{ entry: `${folder}/+page.server.ts actions.${name}`, may },
  ask: (e, w) => ({
    ...{ method: 'POST', path: path(e, w) + (name === 'default' ? '' : `?/${name}`), form: fields(e, w) }
  }),
  ...more
});
const call = (
  folder: string,
  method: Ask['method'],
  may: Row['may'],
  path: Path,
  json?: (e: Estate) => unknown,
  headers?: (e: Estate) => Record<string, string>
): Row => ({
  ...{ entry: `src/routes/${folder}/+server.ts ${method}`, may },
  ask: (e, w) => ({ method, path: path(e, w), json: json?.(e), headers: headers?.(e) })
});

const study: Path = (e) => `/studies/${e.study}`;
const tree: Path = (e) => `/studies/${e.study}/trees/${e.tree}`;
const group: Path = (e) => `/settings/${e.group}`;
const tus = { 'tus-resumable': '1.0.0' };
/** A version that the thing never had: whoever may write is told of a conflict, and nothing changes. */
const STALE = 999;
const PASSWORD = 'three dry kettles on a shelf';
const HASH = 'f'.repeat(64);

const PAGES: Row[] = [
  page(APP, SIGNED_IN, () => '/'),
  page(`${APP}/account`, SIGNED_IN, () => '/account'),
  page(`${APP}/settings`, SIGNED_IN, () => '/settings'),
  page(`${APP}/studies`, SIGNED_IN, () => '/studies'),
  page(GROUP, TEAM, group, { ofGroup: true }),
  page(`${GROUP}/audit`, LEAD, (e) => `/settings/${e.group}/audit`, { ofGroup: true }),
  page(`${GROUP}/defaults`, TEAM, (e) => `/settings/${e.group}/defaults`, { ofGroup: true }),
  page(`${GROUP}/invitations`, LEAD, (e) => `/settings/${e.group}/invitations`, { ofGroup: true }),
  page(`${STUDY}/(study)`, EVERYBODY, study),
  page(`${STUDY}/(study)/members`, EVERYBODY, (e) => `/studies/${e.study}/members`),
  page(`${STUDY}/(study)/runs`, EVERYBODY, (e) => `/studies/${e.study}/runs`),
  page(`${STUDY}/runs/[run]`, EVERYBODY, (e) => `/studies/${e.study}/runs/${e.run}`),
  page(TREE, EVERYBODY, tree),
  page(`${TREE}/review`, EVERYBODY, (e) => `/studies/${e.study}/trees/${e.tree}/review`),
  page(`${TREE}/report`, EVERYBODY, (e) => `/studies/${e.study}/trees/${e.approved}/report`),
  page(`${TREE}/report`, TEAM, (e) => `/studies/${e.study}/trees/${e.tree}/report`, { refused: 'hidden' })
];

const reviewPath: Path = (e) => `/studies/${e.study}/trees/${e.tree}/review`;
const reportPath: Path = (e) => `/studies/${e.study}/trees/${e.tree}/report`;
const REVIEWERS: Members = ['reviewer', 'lead'];
const FORMS: Row[] = [
  form(
    `${APP}/account`,
    'profile',
    SIGNED_IN,
    () => '/account',
    () => ({ name: 'New name' })
  ),
  form(
    `${APP}/account`,
    'password',
    SIGNED_IN,
    () => '/account',
    () => ({ current: 'not the password', password: PASSWORD, again: PASSWORD })
  ),
  form(
    `${APP}/account`,
    'endSession',
    SIGNED_IN,
    () => '/account',
    () => ({ session: HASH }),
    { granted: 'hidden' }
  ),
  form(
    `${APP}/account`,
    'endOthers',
    SIGNED_IN,
    () => '/account',
    () => ({})
  ),
  form(
    `${APP}/settings`,
    'create',
    SIGNED_IN,
    () => '/settings',
    () => ({ name: 'A group of my own' })
  ),
  form(
    `${APP}/studies`,
    'create',
    ANNOTATORS,
    () => '/studies',
    (e) => ({ groupId: e.group, name: 'New' }),
    {
      ofGroup: true
    }
  ),
  form(GROUP, 'change', LEAD, group, (e) => ({ userId: e.reviewer, role: 'reviewer' }), { ofGroup: true }),
  form(GROUP, 'remove', LEAD, group, () => ({ userId: crypto.randomUUID() }), { ofGroup: true, granted: 'hidden' }),
  form(
    `${GROUP}/defaults`,
    'rename',
    LEAD,
    (e) => `/settings/${e.group}/defaults`,
    () => ({ name: 'Renamed' }),
    {
      ofGroup: true
    }
  ),
  form(
    `${GROUP}/defaults`,
    'save',
    LEAD,
    (e) => `/settings/${e.group}/defaults`,
    () => ({ version: String(STALE), elements: '', adducts: '', approvalsNeeded: '1' }),
    {
      ofGroup: true
    }
  ),
  form(
    ...([`${GROUP}/invitations`, 'invite', LEAD] as const),
    (e) => `/settings/${e.group}/invitations`,
    () => ({ email: 'somebody@rivenmark.test', role: 'annotator' }),
    { ofGroup: true }
  ),
  form(
    ...([`${GROUP}/invitations`, 'withdraw', LEAD] as const),
    (e) => `/settings/${e.group}/invitations`,
    () => ({ invitation: HASH }),
    { ofGroup: true }
  ),
  form(`${STUDY}/(study)`, 'edit', ANNOTATORS, study, () => ({ name: 'Renamed', version: String(STALE) })),
  form(
    `${STUDY}/(study)/members`,
    'share',
    LEAD,
    (e) => `/studies/${e.study}/members`,
    () => ({ days: '3' })
  ),
  form(
    `${STUDY}/(study)/members`,
    'revoke',
    LEAD,
    (e) => `/studies/${e.study}/members`,
    () => ({ id: HASH }),
    { granted: 'hidden' }
  ),
  form(`${TREE}/report`, 'share', LEAD, reportPath, () => ({ days: '3' })),
  form(`${TREE}/report`, 'revoke', LEAD, reportPath, () => ({ id: HASH }), { granted: 'hidden' }),
  form(`${TREE}/review`, 'ask', ANNOTATORS, reviewPath, (e) => ({
    ...{ 'reviewers[]': [e.reviewer], message: '', treeVersion: String(STALE) }
  })),
  form(`${TREE}/review`, 'verdict', REVIEWERS, reviewPath, () => ({ verdict: 'approve', revision: '1', hash: HASH })),
  form(`${TREE}/review`, 'withdraw', ANNOTATORS, reviewPath, () => ({ revision: '1' })),
  form(`${TREE}/review`, 'level', ANNOTATORS, reviewPath, () => ({ version: String(STALE), level: '3' }))
];

const CALLS: Row[] = [
  call('api/jobs/[job]', 'GET', EVERYBODY, (e) => `/api/jobs/${e.job}`),
  call('api/jobs/[job]/cancel', 'POST', ANNOTATORS, (e) => `/api/jobs/${e.job}/cancel`),
  call('api/jobs/[job]/retry', 'POST', ANNOTATORS, (e) => `/api/jobs/${e.job}/retry`),
  call(
    'api/remarks/[remark]',
    'POST',
    TEAM,
    (e) => `/api/remarks/${e.remark}`,
    () => ({ body: 'An answer.' })
  ),
  call(
    'api/remarks/[remark]',
    'PATCH',
    TEAM,
    (e) => `/api/remarks/${e.remark}`,
    () => ({ resolved: false })
  ),
  call(
    'api/runs/[run]/trees',
    'POST',
    ANNOTATORS,
    (e) => `/api/runs/${e.run}/trees`,
    () => ({ precursorIds: [crypto.randomUUID()] })
  ),
  call('api/trees/[tree]', 'GET', EVERYBODY, (e) => `/api/trees/${e.tree}`),
  call(
    'api/trees/[tree]',
    'PATCH',
    ANNOTATORS,
    (e) => `/api/trees/${e.tree}`,
    () => ({ version: STALE, name: 'X' })
  ),
  call(
    'api/trees/[tree]/claims',
    'POST',
    ANNOTATORS,
    (e) => `/api/trees/${e.tree}/claims`,
    (e) => ({
      decisions: [{ ionId: e.ion, version: STALE, action: 'reject', reason: 'none' }]
    })
  ),
  call('api/trees/[tree]/ions/[ion]', 'GET', EVERYBODY, (e) => `/api/trees/${e.tree}/ions/${e.ion}`),
  call('api/trees/[tree]/remarks', 'GET', EVERYBODY, (e) => `/api/trees/${e.tree}/remarks`),
  call(
    'api/trees/[tree]/remarks',
    'POST',
    TEAM,
    (e) => `/api/trees/${e.tree}/remarks`,
    () => ({
      ...{ anchor: 'tree', body: 'A remark.' }
    })
  ),
  call('api/trees/[tree]/suggest', 'POST', ANNOTATORS, (e) => `/api/trees/${e.tree}/suggest`),
  call(...(['api/uploads/[...path]', 'POST', ANNOTATORS, () => '/api/uploads', undefined] as const), (e) => ({
    ...tus,
    'upload-length': '10',
    'upload-metadata': `filename ${btoa('Kelp41-3.mzML')},studyId ${btoa(e.study)}`
  })),
  ...['report.pdf', 'ions.csv', 'figure.svg', 'tree.json'].map((file) => ({
    ...{ entry: `${TREE}/report/[file]/+server.ts GET`, may: EVERYBODY },
    ask: (e: Estate): Ask => ({
      ...{ method: 'GET', path: `/studies/${e.study}/trees/${e.approved}/report/${file}` }
    })
  }))
];

/** A transfer belongs to the person who began it, here the annotator; everybody else is told that there is none. */
export const TRANSFERS: Ask['method'][] = ['HEAD', 'PATCH', 'DELETE'];

export const ROWS: readonly Row[] = [...PAGES, ...FORMS, ...CALLS];

/** Entries that the tests below try by themselves, or that are open by design (tests/unit/route-guards.test.ts says why). */
export const ELSEWHERE: readonly string[] = [
  `${APP}/+layout.server.ts load`,
  `${GROUP}/+layout.server.ts load`,
  `${STUDY}/(study)/+layout.server.ts load`,
  `${GROUP}/+page.server.ts actions.leave`,
  `${STUDY}/(study)/+page.server.ts actions.delete`,
  `${STUDY}/runs/[run]/+page.server.ts actions.delete`,
  ...TRANSFERS.map((method) => `src/routes/api/uploads/[...path]/+server.ts ${method}`),
  'src/routes/api/uploads/[...path]/+server.ts OPTIONS',
  'src/routes/(auth)/sign-in/+page.server.ts load',
  'src/routes/(auth)/sign-in/+page.server.ts actions.default',
  'src/routes/(auth)/sign-out/+page.server.ts load',
  'src/routes/(auth)/sign-out/+page.server.ts actions.default',
  'src/routes/(auth)/forgot/+page.server.ts actions.default',
  'src/routes/(auth)/reset/+page.server.ts load',
  'src/routes/(auth)/reset/+page.server.ts actions.default',
  'src/routes/(auth)/invitation/+page.server.ts load',
  'src/routes/(auth)/invitation/+page.server.ts actions.join',
  'src/routes/(auth)/invitation/+page.server.ts actions.accept',
  'src/routes/shared/[token]/+page.server.ts load',
  'src/routes/dev/mail/+page.server.ts load'
];
