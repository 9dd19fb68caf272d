import { mkdir, mkdtemp, rm, symlink, writeFile } from 'node:fs/promises';
import { request } from 'node:http';
import { connect } from 'node:net';
import { networkInterfaces, tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { startViewServer, type ViewServer } from '../../../src/node/view-server.ts';

let folder: string;
let server: ViewServer;
let port: number;

interface Answer {
  readonly status: number;
  readonly type: string;
  readonly body: string;
  readonly headers: NodeJS.Dict<string | string[]>;
}

/** A request whose path goes out as it stands: fetch would tidy `..` away before sending. */
function ask(path: string, options: { host?: string; method?: string } = {}): Promise<Answer> {
  return new Promise((done, fail) => {
    const sent = request(
      {
        host: '127.0.0.1',
        port,
        path,
        method: options.method ?? 'GET',
        headers: { host: options.host ?? `127.0.0.1:${port}` },
      },
      (answer) => {
        let body = '';
        answer.setEncoding('utf8');
        answer.on('data', (part) => (body += part));
        answer.on('end', () =>
          done({
            status: answer.statusCode ?? 0,
            type: answer.headers['content-type'] ?? '',
            body,
            headers: answer.headers,
          }),
        );
      },
    );
    sent.on('error', fail);
    sent.end();
  });
}

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'view-server-'));
  const viewer = join(folder, 'viewer');
  await mkdir(join(viewer, 'assets'), { recursive: true });
  await writeFile(join(viewer, 'index.html'), '<!doctype html><title>page</title>');
  await writeFile(join(viewer, 'assets', 'main.js'), 'export {};');
  await writeFile(join(viewer, 'assets', 'main.css'), 'p {}');
  for (const run of ['one', 'two']) {
    await mkdir(join(folder, run));
    await writeFile(join(folder, run, 'tree.vtp'), `tree of ${run}`);
    await writeFile(join(folder, run, 'report.json'), '{}');
    await writeFile(join(folder, run, 'private.txt'), 'secret');
  }
  await writeFile(join(folder, 'two', 'lobe.stl'), 'solid lobe');
  await writeFile(join(folder, 'outside.stl'), 'secret');
  await symlink(join(folder, 'outside.stl'), join(folder, 'two', 'link.stl'));
  await writeFile(join(folder, 'two', 'own name.swc'), 'swc');
  server = await startViewServer({
    viewerDir: viewer,
    port: 0,
    runs: [
      { name: 'first', folder: join(folder, 'one') },
      { name: 'second', folder: join(folder, 'two') },
      { name: 'third', folder: join(folder, 'two'), tree: 'own name.swc' },
    ],
  });
  port = Number(new URL(server.url).port);
});

afterAll(async () => {
  await server.close();
  await rm(folder, { recursive: true });
});

describe('what is served', () => {
  it('gives the viewer with its types', async () => {
    const page = await ask('/');
    expect([page.status, page.type]).toEqual([200, 'text/html; charset=utf-8']);
    expect(page.body).toContain('<title>page</title>');
    expect((await ask('/assets/main.js?v=1')).type).toContain('text/javascript');
    expect((await ask('/assets/main.css')).type).toContain('text/css');
  });

  it('lists the runs and gives their files', async () => {
    expect(JSON.parse((await ask('/runs.json')).body)).toEqual([
      { name: 'first', tree: 'tree.vtp', files: ['tree.vtp', 'report.json'] },
      { name: 'second', tree: 'tree.vtp', files: ['tree.vtp', 'lobe.stl', 'report.json'] },
      { name: 'third', tree: 'own name.swc', files: ['own name.swc', 'lobe.stl', 'report.json'] },
    ]);
    const tree = await ask('/run/1/tree.vtp');
    expect([tree.status, tree.body, tree.type]).toEqual([200, 'tree of two', 'application/octet-stream']);
    expect((await ask('/run/2/own%20name.swc')).body).toBe('swc');
    expect((await ask('/run/0/report.json')).type).toContain('application/json');
  });

  it('answers HEAD without a body', async () => {
    const head = await ask('/run/0/tree.vtp', { method: 'HEAD' });
    expect([head.status, head.body, head.headers['content-length']]).toEqual([200, '', '11']);
  });
});

describe('what is refused', () => {
  it.each([
    '/../outside.stl',
    '/run/0/../two/tree.vtp',
    '/run/0/..%2f..%2foutside.stl',
    '/run/0/%2e%2e/two/private.txt',
    '/run/0/....//private.txt',
    '/run/0/..\\two\\tree.vtp',
    '/%2e%2e/outside.stl',
    '/run/0/tree.vtp%00',
    '//etc/passwd',
    '/run/0/private.txt',
    '/run/0/',
    '/run/3/tree.vtp',
    '/run/1/link.stl',
    '/run/-1/tree.vtp',
    '/%',
    '/assets',
  ])('refuses %s', async (path) => {
    const answer = await ask(path);
    expect(answer.status).toBe(404);
    expect(answer.body).not.toContain('secret');
  });

  it('refuses every host name but the loopback ones, whatever is asked for', async () => {
    for (const host of ['evil.example', `evil.example:${port}`, '127.0.0.1', `127.0.0.1:${port + 1}`]) {
      for (const path of ['/', '/runs.json', '/run/0/tree.vtp']) {
        expect((await ask(path, { host })).status, `${host} ${path}`).toBe(403);
      }
    }
    expect((await ask('/', { host: `localhost:${port}` })).status).toBe(200);
  });

  it('refuses to be written to', async () => {
    for (const method of ['POST', 'PUT', 'DELETE', 'OPTIONS']) {
      expect((await ask('/run/0/tree.vtp', { method })).status).toBe(405);
    }
  });

  it('lets no other page read it and the page load nothing from elsewhere', async () => {
    for (const path of ['/', '/run/0/tree.vtp', '/no-such']) {
      const { headers } = await ask(path);
      expect(headers['cross-origin-resource-policy']).toBe('same-origin');
      expect(headers['access-control-allow-origin']).toBeUndefined();
      expect(headers['content-security-policy']).toContain("default-src 'self'");
      expect(headers['x-content-type-options']).toBe('nosniff');
    }
  });
});

describe('where it listens', () => {
  const knock = (host: string) =>
    new Promise<boolean>((done) => {
      const socket = connect({ host, port, timeout: 2000 });
      const end = (open: boolean) => {
        socket.destroy();
        done(open);
      };
      socket.on('connect', () => end(true));
      socket.on('error', () => end(false));
      socket.on('timeout', () => end(false));
    });

  it('answers on the loopback address', async () => {
    expect(new URL(server.url).hostname).toBe('127.0.0.1');
    expect(await knock('127.0.0.1')).toBe(true);
  });

  it('does not answer on any other address of this machine', async () => {
    const others = Object.values(networkInterfaces())
      .flatMap((list) => list ?? [])
      .filter(({ address, family }) => family === 'IPv4' && !address.startsWith('127.'))
      .map(({ address }) => address);
    // 127.0.0.2 is this machine too, on Linux: there is always one address to try there.
    if (process.platform === 'linux') others.push('127.0.0.2');
    for (const address of others) expect(await knock(address), address).toBe(false);
  });

  it('says when the port is taken', async () => {
    await expect(startViewServer({ runs: [], viewerDir: join(folder, 'viewer'), port })).rejects.toMatchObject({
      code: 'EADDRINUSE',
    });
  });
});
