/** `npm test`: installs what is missing, then goes on in test.ts. Only Node's own modules here. */
import { bootstrap, FOR_TESTS, runCommand } from './bootstrap.mjs';
import { handOver } from './hand-over.mjs';

runCommand(async () => {
  await bootstrap(FOR_TESTS);
  return handOver('test.ts', process.argv.slice(2));
});
