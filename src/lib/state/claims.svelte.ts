import { createMutation, useQueryClient } from '@tanstack/svelte-query';
import type { ClaimDecision } from '$lib/schema/tree';
import type { ClaimsResult, WorkbenchView } from '$lib/schema/workbench';
import { ApiError, request } from './api';
import { applyResult, expectDecisions } from './optimistic';
import { conflictText, readConflicts } from './words';

export const treeKey = (treeId: string) => ['tree', treeId] as const;
export const ionKey = (treeId: string, ionId: number) => ['tree', treeId, 'ion', ionId] as const;

/** What went wrong with a decision, in words. */
export interface ClaimTrouble {
  message: string;
  cure: string | null;
  /** the ion it is about, when a colleague was first */
  ionId: number | null;
}

const troubleOf = (error: Error): ClaimTrouble => {
  if (!(error instanceof ApiError)) return { message: error.message, cure: null, ionId: null };
  const [first, ...more] = readConflicts(error.details);
  if (!first) return { message: error.message, cure: error.cure, ionId: null };
  const rest = more.length ? ` ${more.length} more of the chosen ions changed too.` : '';
  return { message: conflictText(first, new Date()) + rest, cure: 'Nothing of yours was saved.', ionId: first.ionId };
};

/**
 * Decides claims: shown at once, taken back when the server refuses. Decisions of one tree go out one after the other,
 * so that two quick ones on the same ion do not meet as a conflict.
 */
export function useClaims(treeId: () => string) {
  const client = useQueryClient();
  const state: { trouble: ClaimTrouble | null } = $state({ trouble: null });
  const mutation = createMutation(() => ({
    scope: { id: `claims ${treeId()}` },
    mutationFn: (decisions: ClaimDecision[]) =>
      request<ClaimsResult>(`/api/trees/${treeId()}/claims`, 'POST', { decisions }),
    onMutate: async (decisions: ClaimDecision[]) => {
      state.trouble = null;
      await client.cancelQueries({ queryKey: treeKey(treeId()), exact: true });
      const before = client.getQueryData<WorkbenchView>(treeKey(treeId()));
      if (before) client.setQueryData(treeKey(treeId()), expectDecisions(before, decisions));
      return { before };
    },
    onError: async (error: Error, _decisions: ClaimDecision[], context?: { before?: WorkbenchView }) => {
      state.trouble = troubleOf(error);
      if (context?.before) client.setQueryData(treeKey(treeId()), context.before);
      await client.invalidateQueries({ queryKey: treeKey(treeId()) });
    },
    onSuccess: async (result: ClaimsResult) => {
      const now = client.getQueryData<WorkbenchView>(treeKey(treeId()));
      if (now) client.setQueryData(treeKey(treeId()), applyResult(now, result));
      await client.invalidateQueries({ queryKey: [...treeKey(treeId()), 'ion'] });
    }
  }));
  return {
    get trouble() {
      return state.trouble;
    },
    get busy() {
      return mutation.isPending;
    },
    dismiss: () => (state.trouble = null),
    decide: (decisions: ClaimDecision[]) => mutation.mutate(decisions)
  };
}
export type Claims = ReturnType<typeof useClaims>;
