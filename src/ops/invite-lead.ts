/** `npx tsx src/ops/invite-lead.ts ADDRESS GROUP-NAME`: the first group of an installation, and the way in for its lead. */
import { randomUUID } from 'node:crypto';
import { z } from 'zod';
import { initialGroupDefaults } from '../lib/schema/group';
import { closeDatabase, database } from '../lib/server/db';
import { groups } from '../lib/server/db/schema';
import { issueToken, tokenLink } from '../lib/server/services/mail-token';
import { runCommand } from './bootstrap.mjs';
import { runningProduct } from './run-record';
import { Advice, say } from './run-quietly.mjs';
import { filesFolder, readSettings } from './settings';

const callSchema = z.tuple([z.email(), z.string().trim().min(1).max(120)]);

async function inviteLead(email: string, name: string): Promise<string> {
  return database().transaction(async (tx) => {
    const groupId = randomUUID();
    await tx.insert(groups).values({ id: groupId, name, defaults: initialGroupDefaults });
    const { secret } = await issueToken(tx, { kind: 'invitation', email, groupId, role: 'lead', studyIds: [] });
    return tokenLink('invitation', secret);
  });
}

runCommand(async () => {
  const call = callSchema.safeParse(process.argv.slice(2));
  if (!call.success)
    throw new Advice('Usage: npx tsx src/ops/invite-lead.ts ADDRESS GROUP-NAME (quote a name with blanks)');
  const settings = readSettings(process.env, []);
  const running = runningProduct(settings.data);
  if (!running?.databaseUrl) throw new Advice('Rivenmark does not run. Start it with `npm start`, then invite.');
  Object.assign(process.env, {
    DATABASE_URL: running.databaseUrl,
    ORIGIN: running.origin,
    RIVENMARK_FILES: filesFolder(settings, process.env)
  });
  try {
    say(`Send this link to ${call.data[0]}; it works once, for seven days:\n${await inviteLead(...call.data)}`);
  } finally {
    await closeDatabase();
  }
  return 0;
});
