import { describe, expect, it } from 'vitest';
import {
  accepts,
  decide,
  evolve,
  initialState,
  TRANSITIONS,
  type CommandType,
  type ReviewCommand,
  type ReviewEvent,
  type ReviewState,
  type ReviewStatus
} from './workflow';

const given = (...commands: ReviewCommand[]): ReviewState =>
  commands.reduce((state, command) => decide(command, state).reduce(evolve, state), initialState);
const ask = (reviewers = ['reviewer'], approvalsNeeded = 1): ReviewCommand => ({
  type: 'ask-for-review',
  by: 'annotator',
  reviewers,
  approvalsNeeded
});
const approve = (by = 'reviewer', revision = 1): ReviewCommand => ({ type: 'approve', by, revision });
const changes = (by = 'reviewer', revision = 1, reason = 'The loss at 204 is doubtful.'): ReviewCommand => ({
  type: 'ask-for-changes',
  by,
  revision,
  reason
});
const withdraw = (by = 'annotator', revision = 1): ReviewCommand => ({ type: 'withdraw', by, revision });
const change: ReviewCommand = { type: 'change-tree' };
const types = (events: ReviewEvent[]) => events.map((e) => e.type);
const refusal = (code: string): unknown => expect.objectContaining({ name: 'WorkflowError', code });

describe('given a draft', () => {
  it('when a review is asked then revision 1 is under review', () => {
    expect(given(ask())).toMatchObject({
      status: 'in-review',
      revision: 1,
      author: 'annotator',
      reviewers: ['reviewer']
    });
  });

  it('when nobody is named then it is refused', () => {
    expect(() => given(ask([]))).toThrow(refusal('too-few-reviewers') as Error);
  });

  it('when the group needs two approvals and one reviewer is named twice then it is refused', () => {
    expect(() => given(ask(['reviewer', 'reviewer'], 2))).toThrow(refusal('too-few-reviewers') as Error);
  });

  it('when the author names themself then it is refused', () => {
    expect(() => given(ask(['reviewer', 'annotator']))).toThrow(refusal('reviewer-is-author') as Error);
  });

  it('when a verdict arrives then it is refused', () => {
    expect(() => decide({ type: 'approve', by: 'reviewer', revision: 0 }, initialState)).toThrow(
      refusal('not-now') as Error
    );
  });
});

describe('given a revision under review', () => {
  it('when its reviewer approves then it is approved', () => {
    expect(given(ask(), approve())).toEqual({ status: 'approved', revision: 1, approved: 1 });
  });

  it('when its author gives the verdict then it is refused', () => {
    expect(() => given(ask(), approve('annotator'))).toThrow(refusal('own-revision') as Error);
    expect(() => given(ask(), changes('annotator'))).toThrow(refusal('own-revision') as Error);
  });

  it('when somebody who was not asked gives a verdict then it is refused', () => {
    expect(() => given(ask(), approve('second'))).toThrow(refusal('not-asked') as Error);
  });

  it('when two approvals are needed then the first does not approve it and the second does', () => {
    const first = given(ask(['reviewer', 'second'], 2), approve('reviewer'));
    expect(first).toMatchObject({ status: 'in-review', approvals: ['reviewer'] });
    expect(types(decide(approve('second'), first))).toEqual(['approval-given', 'revision-approved']);
  });

  it('when a reviewer approves twice then the second is refused', () => {
    expect(() => given(ask(['reviewer', 'second'], 2), approve('reviewer'), approve('reviewer'))).toThrow(
      refusal('already-decided') as Error
    );
  });

  it('when changes are asked then the reason is kept and the author has to answer', () => {
    expect(decide(changes(), given(ask()))).toEqual([
      { type: 'changes-asked', revision: 1, by: 'reviewer', reason: 'The loss at 204 is doubtful.' }
    ]);
    expect(given(ask(), changes())).toMatchObject({ status: 'changes-asked', author: 'annotator' });
  });

  it('when changes are asked without a reason then it is refused', () => {
    expect(() => given(ask(), changes('reviewer', 1, '  '))).toThrow(refusal('reason-missing') as Error);
  });

  it('when an early approver asks for changes after all then that counts', () => {
    expect(given(ask(['reviewer', 'second'], 2), approve('reviewer'), changes('reviewer')).status).toBe(
      'changes-asked'
    );
  });

  it('when a review is asked again then the open revision is superseded', () => {
    expect(types(decide(ask(), given(ask())))).toEqual(['revision-superseded', 'review-asked']);
    expect(given(ask(), ask())).toMatchObject({ status: 'in-review', revision: 2, approvals: [] });
  });

  it('when a verdict on the superseded revision arrives then it is refused', () => {
    expect(() => given(ask(), ask(), approve('reviewer', 1))).toThrow(refusal('superseded') as Error);
  });

  it('when its author withdraws it then the tree is a draft and no verdict counts', () => {
    const state = given(ask(), withdraw());
    expect(state.status).toBe('draft');
    expect(() => decide(approve(), state)).toThrow(refusal('not-now') as Error);
  });

  it('when somebody else withdraws it then it is refused', () => {
    expect(() => given(ask(), withdraw('reviewer'))).toThrow(refusal('not-author') as Error);
  });

  it('when the tree changes and the frozen revision is approved then the tree itself is a draft', () => {
    expect(given(ask(), change, approve())).toEqual({ status: 'draft', revision: 1, approved: 1 });
  });
});

describe('given an approved tree', () => {
  it('when it changes then it is a draft and the approved revision stays', () => {
    expect(given(ask(), approve(), change)).toEqual({ status: 'draft', revision: 1, approved: 1 });
  });

  it('when a review is asked although nothing changed then it is refused', () => {
    expect(() => given(ask(), approve(), ask())).toThrow(refusal('not-now') as Error);
  });

  it('when a changed tree is sent back then the older approval still stays', () => {
    expect(given(ask(), approve(), change, ask(), changes('reviewer', 2))).toMatchObject({
      status: 'changes-asked',
      revision: 2,
      approved: 1
    });
  });
});

describe('given changes asked', () => {
  it('when a review is asked again then a new revision opens', () => {
    expect(given(ask(), changes(), change, ask())).toMatchObject({ status: 'in-review', revision: 2 });
  });
});

describe('the table of transitions', () => {
  it('reaches every status from a draft', () => {
    const seen = new Set<ReviewStatus>(['draft']);
    for (const status of seen) for (const next of Object.values(TRANSITIONS[status]).flat()) seen.add(next);
    expect([...seen].sort()).toEqual(['approved', 'changes-asked', 'draft', 'in-review']);
  });

  it('agrees with decide and evolve for every status and command', () => {
    const states: ReviewState[] = [given(), given(ask()), given(ask(), changes()), given(ask(), approve())];
    states.push(given(ask(['reviewer', 'second'], 2)), given(ask(), change));
    const commands: ReviewCommand[] = [ask(), change];
    for (const state of states)
      for (const command of [...commands, approve('reviewer', state.revision), changes('reviewer', state.revision)]) {
        const allowed = TRANSITIONS[state.status][command.type as CommandType];
        if (!accepts(state.status, command.type)) expect(() => decide(command, state)).toThrow();
        else expect(allowed).toContain(decide(command, state).reduce(evolve, state).status);
      }
  });
});
