import { eq } from 'drizzle-orm';
import type { Actor } from '../auth/authorize';
import { config } from '../config';
import type { Executor } from '../db/connection';
import { users, type studies, type trees } from '../db/schema';
import { queueMail, reviewRequestMail, verdictMail } from '../mail';

interface About {
  tree: Pick<typeof trees.$inferSelect, 'id' | 'name' | 'precursorMz'>;
  study: Pick<typeof studies.$inferSelect, 'id' | 'name' | 'groupId'>;
  number: number;
}

const link = ({ study, tree, number }: About): string =>
  `${new URL(config().ORIGIN).origin}/studies/${study.id}/trees/${tree.id}/review?revision=${number}`;
const nameOf = ({ tree }: About): string => `${tree.name} (m/z ${tree.precursorMz.toFixed(4)})`;

/** Mails each named reviewer; goes out when the transaction stands. */
export async function mailReviewers(
  tx: Executor,
  input: About & { author: Actor; reviewers: readonly { name: string; email: string }[]; message: string }
): Promise<void> {
  const { author, reviewers, message, study, number } = input;
  for (const { name, email } of reviewers)
    await queueMail(tx, {
      to: email,
      groupId: study.groupId,
      createdBy: author.id,
      message: reviewRequestMail({
        reviewer: name,
        askedBy: author.name,
        tree: nameOf(input),
        study: study.name,
        revision: number,
        message,
        link: link(input)
      })
    });
}

/** Mails the author of a revision what a reviewer decided; nothing when the account is gone. */
export async function mailVerdict(
  tx: Executor,
  input: About & { reviewer: Actor; authorId: string | null; verdict: 'approve' | 'ask-for-changes'; reason: string }
): Promise<void> {
  const { reviewer, authorId, verdict, reason, study, number } = input;
  if (!authorId) return;
  const [author] = await tx.select({ name: users.name, email: users.email }).from(users).where(eq(users.id, authorId));
  if (!author) return;
  await queueMail(tx, {
    to: author.email,
    groupId: study.groupId,
    createdBy: reviewer.id,
    message: verdictMail({
      ...{ receiver: author.name, reviewer: reviewer.name, tree: nameOf(input), study: study.name },
      ...{ revision: number, verdict, reason, link: link(input) }
    })
  });
}
