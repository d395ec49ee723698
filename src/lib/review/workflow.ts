/**
 * The way of a tree through review, as pure functions: a command is decided against a state and gives events, events
 * evolve the state. No clock, no database, no ids made here; people are ids, revisions are numbers.
 */

export type ReviewStatus = 'draft' | 'in-review' | 'changes-asked' | 'approved';

interface Common {
  /** number of the newest revision, 0 before the first. */
  revision: number;
  /** newest approved revision: stays readable and citable whatever follows. */
  approved: number | null;
}

export interface UnderReview extends Common {
  status: 'in-review';
  author: string;
  reviewers: readonly string[];
  approvals: readonly string[];
  /** how many of the reviewers must approve. */
  approvalsNeeded: number;
  /** the tree was edited after the revision was frozen. */
  changedSince: boolean;
}

export type ReviewState =
  | (Common & { status: 'draft' })
  | UnderReview
  | (Common & { status: 'changes-asked'; author: string })
  | (Common & { status: 'approved' });

export type ReviewCommand =
  | { type: 'ask-for-review'; by: string; reviewers: readonly string[]; approvalsNeeded: number }
  | { type: 'approve'; by: string; revision: number }
  | { type: 'ask-for-changes'; by: string; revision: number; reason: string }
  | { type: 'withdraw'; by: string; revision: number }
  | { type: 'change-tree' };

export type ReviewEvent =
  | { type: 'revision-superseded'; revision: number }
  | {
      type: 'review-asked';
      revision: number;
      by: string;
      reviewers: readonly string[];
      approvalsNeeded: number;
    }
  | { type: 'approval-given'; revision: number; by: string }
  | { type: 'revision-approved'; revision: number }
  | { type: 'changes-asked'; revision: number; by: string; reason: string }
  | { type: 'revision-withdrawn'; revision: number; by: string }
  | { type: 'tree-changed' };

export type CommandType = ReviewCommand['type'];

/** Which commands each status takes at all. Screens ask it what to offer; `decide` refuses everything else. */
export const TRANSITIONS: Readonly<Record<ReviewStatus, Partial<Record<CommandType, readonly ReviewStatus[]>>>> = {
  draft: { 'ask-for-review': ['in-review'], 'change-tree': ['draft'] },
  'in-review': {
    'ask-for-review': ['in-review'],
    approve: ['in-review', 'approved', 'draft'],
    'ask-for-changes': ['changes-asked'],
    withdraw: ['draft'],
    'change-tree': ['in-review']
  },
  'changes-asked': { 'ask-for-review': ['in-review'], 'change-tree': ['changes-asked'] },
  approved: { 'change-tree': ['draft'] }
};

/** Whether a status takes a command. */
export const accepts = (status: ReviewStatus, command: CommandType): boolean => command in TRANSITIONS[status];

export type WorkflowErrorCode =
  | 'not-now'
  | 'superseded'
  | 'own-revision'
  | 'not-asked'
  | 'already-decided'
  | 'reason-missing'
  | 'too-few-reviewers'
  | 'reviewer-is-author'
  | 'not-author';

/** A command that the state does not allow: why, and what to do. */
export class WorkflowError extends Error {
  constructor(
    readonly code: WorkflowErrorCode,
    message: string,
    readonly cure: string
  ) {
    super(message);
    this.name = 'WorkflowError';
  }
}

export const initialState: ReviewState = { status: 'draft', revision: 0, approved: null };

/**
 * @returns the events that follow from a command
 * @throws WorkflowError when the state does not allow it
 */
export function decide(command: ReviewCommand, state: ReviewState): ReviewEvent[] {
  if ('revision' in command) refuseOutdated(command.revision, state);
  if (!accepts(state.status, command.type)) throw notNow(command.type, state);
  switch (command.type) {
    case 'ask-for-review':
      return askForReview(command, state);
    case 'approve':
      return approve(command, state as UnderReview);
    case 'ask-for-changes':
      return askForChanges(command, state as UnderReview);
    case 'withdraw':
      return withdraw(command, state as UnderReview);
    case 'change-tree':
      return [{ type: 'tree-changed' }];
  }
}

function refuseOutdated(revision: number, state: ReviewState): void {
  if (revision === state.revision) return;
  throw new WorkflowError(
    'superseded',
    `Revision ${revision} was superseded by revision ${state.revision}; a verdict on it no longer counts.`,
    `Look at what changed in revision ${state.revision}, then decide on that one.`
  );
}

function notNow(command: CommandType, state: ReviewState): WorkflowError {
  if (command === 'ask-for-review')
    return new WorkflowError(
      'not-now',
      `Nothing changed since revision ${state.revision} was approved, so there is nothing to review.`,
      'Change the tree first, or cite the approved revision.'
    );
  return new WorkflowError(
    'not-now',
    `Revision ${state.revision} is not under review any more.`,
    'Reload the page to see what happened to it.'
  );
}

function askForReview(command: Extract<ReviewCommand, { type: 'ask-for-review' }>, state: ReviewState): ReviewEvent[] {
  const { by, approvalsNeeded } = command;
  const reviewers = [...new Set(command.reviewers)];
  if (reviewers.includes(by))
    throw new WorkflowError(
      'reviewer-is-author',
      'Whoever asks for a review cannot be its reviewer.',
      'Choose somebody else.'
    );
  if (reviewers.length < Math.max(1, approvalsNeeded))
    throw new WorkflowError(
      'too-few-reviewers',
      `The group asks for ${approvalsNeeded} approval${approvalsNeeded === 1 ? '' : 's'}; ${reviewers.length} reviewer${reviewers.length === 1 ? ' is' : 's are'} named.`,
      'Name more reviewers.'
    );
  const next = { type: 'review-asked', revision: state.revision + 1, by, reviewers, approvalsNeeded } as const;
  return state.status === 'in-review' ? [{ type: 'revision-superseded', revision: state.revision }, next] : [next];
}

function refuseVerdict(by: string, state: UnderReview): void {
  if (by === state.author)
    throw new WorkflowError(
      'own-revision',
      'You made this revision, so somebody else has to judge it.',
      'Wait for the verdict of the reviewers that you asked.'
    );
  if (!state.reviewers.includes(by))
    throw new WorkflowError(
      'not-asked',
      'You were not asked for a verdict on this revision.',
      'Write a remark, or ask the annotator to name you as a reviewer.'
    );
  if (state.approvals.includes(by))
    throw new WorkflowError(
      'already-decided',
      'You have given your verdict on this revision.',
      'Write a remark if you want to add something.'
    );
}

function approve({ by, revision }: { by: string; revision: number }, state: UnderReview): ReviewEvent[] {
  refuseVerdict(by, state);
  const given: ReviewEvent = { type: 'approval-given', revision, by };
  const enough = state.approvals.length + 1 >= state.approvalsNeeded;
  return enough ? [given, { type: 'revision-approved', revision }] : [given];
}

function askForChanges(
  { by, revision, reason }: { by: string; revision: number; reason: string },
  state: UnderReview
): ReviewEvent[] {
  // A reviewer may think better of an approval as long as the revision is open; hence no 'already-decided' here.
  if (!state.approvals.includes(by)) refuseVerdict(by, state);
  if (!reason.trim())
    throw new WorkflowError(
      'reason-missing',
      'Say what has to change.',
      'Write the reason in a sentence or two; it goes to the annotator.'
    );
  return [{ type: 'changes-asked', revision, by, reason: reason.trim() }];
}

function withdraw({ by, revision }: { by: string; revision: number }, state: UnderReview): ReviewEvent[] {
  if (by !== state.author)
    throw new WorkflowError(
      'not-author',
      'Only the person who asked for the review can withdraw it.',
      'Ask that person.'
    );
  return [{ type: 'revision-withdrawn', revision, by }];
}

/** The state after an event. */
export function evolve(state: ReviewState, event: ReviewEvent): ReviewState {
  const { revision, approved } = state;
  switch (event.type) {
    case 'review-asked': {
      const { by: author, reviewers, approvalsNeeded } = event;
      const fresh = { approvals: [], changedSince: false };
      return { status: 'in-review', revision: event.revision, approved, author, reviewers, approvalsNeeded, ...fresh };
    }
    case 'approval-given':
      return state.status === 'in-review' ? { ...state, approvals: [...state.approvals, event.by] } : state;
    case 'revision-approved': {
      // A tree edited while its revision was under review is ahead of what was approved: a draft.
      const ahead = state.status === 'in-review' && state.changedSince;
      return { status: ahead ? 'draft' : 'approved', revision, approved: event.revision };
    }
    case 'changes-asked':
      return state.status === 'in-review'
        ? { status: 'changes-asked', revision, approved, author: state.author }
        : state;
    case 'revision-superseded':
    case 'revision-withdrawn':
      return { status: 'draft', revision, approved };
    case 'tree-changed':
      if (state.status === 'approved') return { status: 'draft', revision, approved };
      return state.status === 'in-review' ? { ...state, changedSince: true } : state;
  }
}
