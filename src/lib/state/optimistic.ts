import { ION_BITS, type ClaimsResult, type IonAfter, type IonColumns, type WorkbenchView } from '$lib/schema/workbench';
import type { ClaimDecision } from '$lib/schema/tree';
import { STATE_LETTER } from './ion-rows';

type Patch = Partial<Omit<IonAfter, 'id'>> & { id: number };

function stringIndex(strings: string[], text: string | null): number {
  if (text === null) return -1;
  const at = strings.indexOf(text);
  return at < 0 ? strings.push(text) - 1 : at;
}

/** Bits of one ion after a patch; absent facts keep theirs. */
function patchedBits(bits: number, patch: Patch): number {
  const set = (flag: number, on: boolean | null | undefined) => {
    if (on !== undefined) bits = on ? bits | flag : bits & ~flag;
  };
  set(ION_BITS.lossRadical, patch.lossRadical);
  set(ION_BITS.oddElectron, patch.oddElectron);
  set(ION_BITS.decided, patch.decided);
  if (patch.link !== undefined) {
    set(ION_BITS.measured, patch.link === 'measured');
    set(ION_BITS.inferred, patch.link === 'inferred');
  }
  return bits;
}

const withAt = <T>(values: T[], at: ReadonlyMap<number, T>): T[] =>
  at.size ? values.map((value, i) => (at.has(i) ? (at.get(i) as T) : value)) : values;

/** New columns with some ions changed; the columns given stay as they are. */
export function patchColumns(ions: IonColumns, patches: readonly Patch[]): IonColumns {
  const where = new Map(ions.id.map((id, i) => [id, i]));
  const known = patches.flatMap((patch) => {
    const at = where.get(patch.id);
    return at === undefined ? [] : [{ at, patch }];
  });
  const strings = [...ions.strings];
  const state = [...ions.state];
  const reasons = { ...ions.reasons };
  const pick = <K extends keyof Patch, V>(key: K, map: (value: Exclude<Patch[K], undefined>) => V) =>
    new Map(
      known.flatMap(({ at, patch }) => {
        const value = patch[key];
        return value === undefined ? [] : [[at, map(value as Exclude<Patch[K], undefined>)] as const];
      })
    );
  for (const { at, patch } of known) {
    if (patch.state) state[at] = STATE_LETTER[patch.state];
    if (patch.reason) reasons[patch.id] = patch.reason;
    else if (patch.reason === null) delete reasons[patch.id];
  }
  return {
    ...ions,
    strings,
    reasons,
    state: state.join(''),
    formula: withAt(
      ions.formula,
      pick('formula', (v) => stringIndex(strings, v))
    ),
    loss: withAt(
      ions.loss,
      pick('loss', (v) => stringIndex(strings, v))
    ),
    fromFormula: withAt(
      ions.fromFormula,
      pick('fromFormula', (v) => stringIndex(strings, v))
    ),
    fromMz: withAt<number | null>(
      ions.fromMz,
      pick('fromMz', (v) => v)
    ),
    errorPpm: withAt<number | null>(
      ions.errorPpm,
      pick('errorPpm', (v) => v)
    ),
    dbe: withAt<number | null>(
      ions.dbe,
      pick('dbe', (v) => v)
    ),
    score: withAt<number | null>(
      ions.score,
      pick('score', (v) => v)
    ),
    version: withAt(
      ions.version,
      pick('version', (v) => v)
    ),
    bits: withAt(ions.bits, new Map(known.map(({ at, patch }) => [at, patchedBits(ions.bits[at], patch)])))
  };
}

const EXPECTED = { confirm: 'confirmed', reject: 'rejected', open: 'open' } as const;

/**
 * What the view will most likely be once the server has taken the decisions. Versions rise by one, as they do on the
 * server, so that a second decision on the same ion goes out with the right one. An undo shows when it is answered.
 */
export function expectDecisions(view: WorkbenchView, decisions: readonly ClaimDecision[]): WorkbenchView {
  const patches = decisions.map((decision): Patch => {
    const { ionId: id, version, action, formula, reason } = decision;
    if (action === 'undo') return { id, version: version + 1 };
    const patch: Patch = { id, version: version + 1, state: EXPECTED[action], reason: reason ?? null, decided: true };
    if (action === 'open')
      return { ...patch, formula: null, loss: null, errorPpm: null, dbe: null, link: null, score: null };
    return formula === undefined ? patch : { ...patch, formula };
  });
  return { ...view, ions: patchColumns(view.ions, patches) };
}

/** The view with the server's answer. */
export function applyResult(view: WorkbenchView, result: ClaimsResult): WorkbenchView {
  const { treeVersion: version, explained, status, ions } = result;
  return { ...view, tree: { ...view.tree, version, explained, status }, ions: patchColumns(view.ions, ions) };
}
