/** `npm run annotate`: from mzML files to annotated trees as JSON, on the same core as the web application. */
import { basename } from 'node:path';
import { annotateTree, assembleFile, finishFile, type AnnotatedTree, type AnnotateOptions } from './annotate-file';
import { CallError, HELP, readCall } from './arguments';
import { listInputs } from './inputs';
import { performAll } from './pool';
import { inputError, type Task } from './tasks';

const WRONG_CALL = 2;
const NOT_READABLE = 3;
/** So many trees of one file are worth the start of threads. */
const MANY_TREES = 6;

/** One line on standard error; what a file contains cannot steer the terminal. */
function say(text: string): void {
  process.stderr.write(`${text.replace(/\p{Cc}/gu, ' ')}\n`);
}

async function annotateAll(trees: Extract<Task, { kind: 'tree' }>[]): Promise<AnnotatedTree[]> {
  if (trees.length < MANY_TREES) return trees.map((task) => annotateTree(task.tree, task.info, task.options));
  const done: AnnotatedTree[] = [];
  await performAll(trees, (result) => {
    if (result.kind === 'tree') done.push(result.tree);
    if (done.length % 20 === 0) say(`${done.length} of ${trees.length} trees`);
  });
  return done;
}

/** A single file: its trees are spread over the cores. */
async function annotateOne(path: string, options: AnnotateOptions): Promise<number> {
  let output: string;
  try {
    const file = await assembleFile(path, options);
    const tasks = file.trees.map((tree) => ({ kind: 'tree' as const, tree, info: file.info, options }));
    const trees = await annotateAll(tasks);
    for (const warning of file.warnings) say(`${file.file}: ${warning}`);
    output = finishFile(file, trees);
  } catch (error) {
    const message = inputError(error);
    if (message === null) throw error;
    say(`${basename(path)}: ${message}`);
    return NOT_READABLE;
  }
  process.stdout.write(`${output}\n`);
  return 0;
}

/** Several files: spread over the cores, one line each in the order given. */
async function annotateMany(files: readonly string[], options: AnnotateOptions): Promise<number> {
  let done = 0;
  let failed = 0;
  await performAll(
    files.map((path) => ({ kind: 'file', path, options })),
    (result) => {
      if (result.kind !== 'file') return;
      process.stdout.write(`${result.line}\n`);
      if (result.failed !== null) failed++;
      say(
        `${++done} of ${files.length}: ${basename(files[done - 1])}${result.failed === null ? '' : `: ${result.failed}`}`
      );
    }
  );
  return failed === files.length ? NOT_READABLE : 0;
}

async function main(): Promise<number> {
  try {
    const call = readCall(process.argv.slice(2));
    if (call.help) {
      process.stdout.write(HELP);
      return 0;
    }
    const { files, lines } = listInputs(call.paths);
    return await (lines ? annotateMany(files, call.options) : annotateOne(files[0], call.options));
  } catch (error) {
    if (!(error instanceof CallError)) throw error;
    say(error.message);
    return WRONG_CALL;
  }
}

// A reader that closes the pipe early (head, for example) ends the command quietly.
process.stdout.on('error', (error: NodeJS.ErrnoException) => process.exit(error.code === 'EPIPE' ? 0 : 1));
main().then(
  (status) => {
    process.exitCode = status;
  },
  (error: unknown) => {
    say(
      `The command failed: ${error instanceof Error ? error.message : String(error)}. Please report this with the file.`
    );
    process.exitCode = 1;
  }
);
