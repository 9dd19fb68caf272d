import { createReadStream } from 'node:fs';
import { readdir, realpath, stat } from 'node:fs/promises';
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http';
import { extname, join, sep } from 'node:path';
import { pipeline } from 'node:stream/promises';

/** A result to look at. */
export interface ViewedRun {
  /** What the viewer calls it. */
  readonly name: string;
  readonly folder: string;
  /** Name of the tree file in the folder; `tree.vtp` where not given. */
  readonly tree?: string;
}

export interface ViewServerOptions {
  readonly runs: readonly ViewedRun[];
  /** Folder of the built viewer. */
  readonly viewerDir: string;
  /** 0 lets the system choose a free one. */
  readonly port: number;
}

export interface ViewServer {
  /** With the trailing slash. */
  readonly url: string;
  close(): Promise<void>;
}

const TYPES: Record<string, string> = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.json': 'application/json; charset=utf-8',
  '.svg': 'image/svg+xml',
  '.png': 'image/png',
  '.woff2': 'font/woff2',
};
const SURFACES = ['.stl', '.ply', '.obj'];
/** The page loads nothing from anywhere else, and no other page may read what is served. */
const HEADERS = {
  'cache-control': 'no-store',
  'content-security-policy':
    "default-src 'self'; img-src 'self' data: blob:; style-src 'self' 'unsafe-inline'; frame-ancestors 'none'",
  'cross-origin-resource-policy': 'same-origin',
  'referrer-policy': 'no-referrer',
  'x-content-type-options': 'nosniff',
};

/**
 * Serves the built viewer and the files of some runs on the loopback address only. What may be asked for is listed
 * before the first request: the viewer's files, and of each run its tree, `report.json`, `spec.json` and surface files
 * that lie in its folder. A path is looked up in that list and never joined to a folder, so none can lead out of it. A
 * request under any host name but the loopback's is refused, so that no foreign page can rebind its name to this server.
 *
 * @throws the system's error where a folder cannot be read or the port is taken (`code` is `EADDRINUSE`)
 */
export async function startViewServer(options: ViewServerOptions): Promise<ViewServer> {
  const { runs, viewerDir, port } = options;
  const served = new Map<string, string>();
  await listViewer(viewerDir, '', served);
  const listing = [];
  for (let i = 0; i < runs.length; i++) {
    const run = runs[i]!;
    const tree = run.tree ?? 'tree.vtp';
    const files = await listRun(run.folder, tree);
    for (const file of files) served.set(`/run/${i}/${file}`, join(run.folder, file));
    listing.push({ name: run.name, tree, files });
  }
  const runsJson = Buffer.from(JSON.stringify(listing));

  let hosts: string[] = [];
  const server = createServer((request, response) => {
    answer(request, response, hosts, served, runsJson).catch(() => {
      if (response.headersSent) response.destroy();
      else refuse(response, 500, 'the file could not be read');
    });
  });
  await new Promise<void>((done, fail) => {
    server.once('error', fail);
    server.listen(port, '127.0.0.1', done);
  });
  const address = server.address();
  if (address === null || typeof address === 'string') throw new Error(`startViewServer: address is ${address}`);
  hosts = [`127.0.0.1:${address.port}`, `localhost:${address.port}`];
  return {
    url: `http://127.0.0.1:${address.port}/`,
    close: () =>
      new Promise((done, fail) => {
        server.close((error) => (error === undefined ? done() : fail(error)));
        server.closeAllConnections();
      }),
  };
}

async function answer(
  request: IncomingMessage,
  response: ServerResponse,
  hosts: readonly string[],
  served: ReadonlyMap<string, string>,
  runsJson: Buffer,
): Promise<void> {
  if (!hosts.includes(request.headers.host ?? '')) return refuse(response, 403, 'only the loopback address is served');
  if (request.method !== 'GET' && request.method !== 'HEAD') return refuse(response, 405, 'only GET is served');
  const path = decodePath(request.url ?? '');
  if (path === '/runs.json') {
    response.writeHead(200, { ...HEADERS, 'content-type': TYPES['.json'], 'content-length': runsJson.length });
    response.end(request.method === 'HEAD' ? undefined : runsJson);
    return;
  }
  const file = served.get(path === '/' ? '/index.html' : path);
  if (file === undefined) return refuse(response, 404, 'no such file');
  // Streamed: a tree of ten million vessels is larger than one buffer may be.
  const { size } = await stat(file);
  const type = TYPES[extname(file).toLowerCase()] ?? 'application/octet-stream';
  response.writeHead(200, { ...HEADERS, 'content-type': type, 'content-length': size });
  if (request.method === 'HEAD') response.end();
  else await pipeline(createReadStream(file), response);
}

/** Path of a request without its query; '' where its escapes are broken. */
function decodePath(url: string): string {
  try {
    return decodeURIComponent(url.split('?')[0]!);
  } catch {
    return '';
  }
}

function refuse(response: ServerResponse, status: number, reason: string): void {
  response.writeHead(status, { ...HEADERS, 'content-type': 'text/plain; charset=utf-8' });
  response.end(`${reason}\n`);
}

async function listViewer(folder: string, prefix: string, served: Map<string, string>): Promise<void> {
  for (const entry of await readdir(folder, { withFileTypes: true })) {
    const path = `${prefix}/${entry.name}`;
    if (entry.isDirectory()) await listViewer(join(folder, entry.name), path, served);
    else if (entry.isFile()) served.set(path, join(folder, entry.name));
  }
}

/** Names of a run's files that may be read, the tree first; links that lead out of the folder are left out. */
async function listRun(folder: string, tree: string): Promise<string[]> {
  const home = (await realpath(folder)) + sep;
  const names = (await readdir(folder)).sort();
  const wanted = names.filter(
    (name) =>
      name === tree || name === 'report.json' || name === 'spec.json' || SURFACES.includes(extname(name).toLowerCase()),
  );
  const files: string[] = [];
  for (const name of wanted) {
    const path = await realpath(join(folder, name));
    if (path.startsWith(home) && (await stat(path)).isFile()) files.push(name);
  }
  return files.sort((a, b) => Number(b === tree) - Number(a === tree));
}
