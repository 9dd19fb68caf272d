import { existsSync, realpathSync } from 'node:fs';
import { basename, dirname, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Command } from 'commander';
import { inputError, splitTreePath } from '../index.ts';
import { isSystemError, readTree, startViewServer, type ViewedRun } from '../node/index.ts';
import { addCommonOptions, addExample, type Context, ONE_FILE_ENDINGS, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { wholeNumber } from './option-values.ts';

/** The built viewer; `npm run build` makes it. */
const VIEWER = fileURLToPath(new URL('../../dist/viewer/', import.meta.url));

interface ViewArguments extends CommonOptions {
  readonly port: string;
}

export function addView(program: Command, context: Context): void {
  const command = program
    .command('view')
    .summary('look at runs in a browser')
    .description(
      'Serves the viewer and the given trees on this machine’s loopback address and prints the address to open.\n' +
        'Runs until Ctrl-C, which is its normal end: exit code 0.',
    )
    .argument('<run...>', `run folders or tree files (${ONE_FILE_ENDINGS})`)
    .option('--port <port>', 'port to serve on; 0 takes a free one', '0');
  addCommonOptions(command, null);
  addExample(command, 'view runs/gel', 'view runs/before runs/after --port 8123');
  command.action((paths: string[], options: ViewArguments) =>
    runWork(context, options, (talk) => view(paths, options, talk)),
  );
}

async function view(paths: readonly string[], options: ViewArguments, talk: Talk): Promise<number> {
  const port = wholeNumber(options.port, '--port', 0, 65_535);
  const runs = paths.map(viewedRun);
  if (!existsSync(VIEWER)) throw inputError('file', VIEWER, 'got no built viewer there, expected one: npm run build');
  const server = await startViewServer({ runs, viewerDir: VIEWER, port }).catch((error: unknown) => {
    const code = isSystemError(error) ? error.code : '';
    if (code !== 'EADDRINUSE' && code !== 'EACCES') throw error;
    const why = code === 'EACCES' ? 'which needs more rights' : 'which is taken';
    throw inputError('port', '--port', `got ${port}, ${why}, expected a free one, or 0 to choose one`);
  });
  try {
    // The address is the one thing that even --quiet must tell.
    talk.io.out(`${server.url}\n`);
    talk.say('Open the address above in a browser; Ctrl-C ends.');
    await talk.io.untilInterrupted();
  } finally {
    await server.close();
  }
  return EXIT.held;
}

/** Where the tree of a path lies. It is read once here, so that a broken one is told of in the terminal. */
function viewedRun(path: string): ViewedRun {
  const tree = readTree(path);
  if (tree.run) return { name: nameOf(path), folder: tree.folder };
  if (splitTreePath(path, path).files.length > 1) {
    const message = `got a tree of several files, which the viewer does not open, expected one file: vesselwright export ${path} --to tree.vtp`;
    throw inputError('extension', path, message);
  }
  const file = realpathSync(path);
  return { name: nameOf(path), folder: dirname(file), tree: basename(file) };
}

function nameOf(path: string): string {
  return basename(resolve(path));
}
