/** `npm start` and `npm run dev`: installs what is missing, then goes on in start.ts. Only Node's own modules here. */
import { bootstrap, MARIADB, runCommand } from './bootstrap.mjs';
import { handOver } from './hand-over.mjs';

runCommand(async () => {
  // A database of the operator's own is used as it is.
  await bootstrap(process.env.DATABASE_URL ? [] : [MARIADB]);
  return handOver('start.ts', process.argv.slice(2));
});
