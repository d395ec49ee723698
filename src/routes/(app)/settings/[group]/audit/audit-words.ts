import { AUDIT_WORDS, type AuditAction } from '$lib/schema/audit';

type Details = Record<string, unknown>;

const text = (details: Details, key: string): string => {
  const value = details[key];
  return typeof value === 'string' || typeof value === 'number' ? String(value) : '';
};

/** "changed a role"; an act of a later version is said by its own name: 'share-link.made' gives "share link made". */
export function actionWords(action: string): string {
  return Object.hasOwn(AUDIT_WORDS, action) ? AUDIT_WORDS[action as AuditAction] : action.replace(/[.-]/g, ' ');
}

/** What exactly, in a few words; empty where the act says it all. */
export function detailWords(action: string, details: Details): string {
  const [name, from, to] = ['name', 'from', 'to'].map((key) => text(details, key));
  switch (action) {
    case 'member.invited':
      return `${text(details, 'email')} as ${text(details, 'role')}`;
    case 'member.invitation-withdrawn':
      return text(details, 'email');
    case 'member.role-changed':
      return `${name}: ${from} → ${to}`;
    case 'member.studies-opened':
      return `${name}: ${text(details, 'studies')} open`;
    case 'group.renamed':
    case 'user.renamed':
      return `${from} → ${to}`;
    case 'group.defaults-changed':
      return `approvals ${text(details, 'approvalsNeeded')}, elements ${text(details, 'elements') || 'as the program'}`;
    case 'claim.confirmed':
    case 'claim.rejected':
    case 'claim.opened':
    case 'claim.undone':
      return claimWords(details);
    case 'share-link.created':
      return `until ${text(details, 'expiresAt').slice(0, 10)}`;
    default:
      return plainDetails(details);
  }
}

/** "m/z 283.1442, C17H19N2O2 – the loss is doubtful" */
function claimWords(details: Details): string {
  const { before, after } = details as Record<string, { formula?: string | null } | undefined>;
  const formula = after?.formula ?? before?.formula;
  const ion = [`m/z ${shown(details.mz)}`, formula].filter(Boolean).join(', ');
  return [ion, text(details, 'reason')].filter(Boolean).join(' – ').slice(0, 300);
}

/** Names, formulas, numbers and the like as they are; ids and nested values say nothing to a reader. */
function plainDetails(details: Details): string {
  return Object.entries(details)
    .filter(
      ([key, value]) => /string|number/.test(typeof value) && value !== '' && !/id$|hash|version|^reply$/i.test(key)
    )
    .map(([key, value]) => (key === 'name' ? String(value) : `${spaced(key)} ${shown(value)}`))
    .join(', ')
    .slice(0, 300);
}

const spaced = (key: string) => (key === 'mz' ? 'm/z' : key.replace(/([A-Z])/g, ' $1').toLowerCase());
const shown = (value: unknown) =>
  typeof value === 'number' && !Number.isInteger(value) ? value.toFixed(4) : String(value);
