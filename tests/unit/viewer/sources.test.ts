import { afterEach, describe, expect, it, vi } from 'vitest';
import { type Found, mayBeTree, sourcesOfFiles, sourcesOfPage } from '../../../viewer/sources.ts';

const found = (...paths: string[]): Found[] =>
  paths.map((path) => {
    const parts = path.split('/');
    return { file: new File([path], parts.pop()!), folder: parts.join('/') };
  });

const page = (search = '') => new URL(`http://127.0.0.1:8000/${search}`);

afterEach(() => vi.unstubAllGlobals());

describe('sourcesOfFiles', () => {
  it('finds the trees of dropped runs and names them after their folders', async () => {
    const sources = sourcesOfFiles(found('run-a/tree.vtp', 'run-a/report.json', 'run-b/tree.vtp', 'run-b/bean.stl'));
    expect(sources.map(({ name, file }) => [name, file])).toEqual([
      ['run-a', 'tree.vtp'],
      ['run-b', 'tree.vtp'],
    ]);
    expect(new TextDecoder().decode(await sources[1]!.read())).toBe('run-b/tree.vtp');
  });

  it('takes single tree files of any readable format, and leaves the rest', () => {
    const sources = sourcesOfFiles(found('nerve.swc', 'own.vtp', 'report.json', 'spec.json', 'notes.txt', 'x.stl'));
    expect(sources.map(({ name }) => name)).toEqual(['nerve.swc', 'own.vtp']);
    expect(sourcesOfFiles(found('report.json', 'notes.txt'))).toEqual([]);
    expect(mayBeTree('TREE.VTP')).toBe(true);
    expect(mayBeTree('lumen.vtp')).toBe(false);
  });
});

describe('sourcesOfPage', () => {
  it('opens what the address names, on the same server only', async () => {
    const sources = await sourcesOfPage(page('?files=run/0/tree.vtp,other/a%20b.swc'));
    expect(sources.map(({ file }) => file)).toEqual(['tree.vtp', 'a b.swc']);
    for (const away of ['http://elsewhere.example/tree.vtp', '//elsewhere.example/tree.vtp', 'file:///etc/passwd']) {
      await expect(sourcesOfPage(page(`?files=${encodeURIComponent(away)}`))).rejects.toThrow('another server');
    }
  });

  it('opens what the server lists', async () => {
    const asked: string[] = [];
    vi.stubGlobal('fetch', async (url: URL) => {
      asked.push(url.pathname);
      if (url.pathname !== '/runs.json') return new Response('bytes');
      return Response.json([
        { name: 'first', tree: 'tree.vtp', files: ['tree.vtp', 'report.json'] },
        { name: 'second', files: ['report.json', 'my tree.swc'] },
      ]);
    });
    const sources = await sourcesOfPage(page());
    expect(sources.map(({ name, file }) => [name, file])).toEqual([
      ['first', 'tree.vtp'],
      ['second', 'my tree.swc'],
    ]);
    await sources[1]!.read();
    expect(asked).toEqual(['/runs.json', '/run/1/my%20tree.swc']);
  });

  it('opens nothing where no server lists runs, and says what a server refused', async () => {
    vi.stubGlobal('fetch', async () => new Response('<html>', { headers: { 'content-type': 'text/html' } }));
    expect(await sourcesOfPage(page())).toEqual([]);
    vi.stubGlobal('fetch', async () => new Response('no', { status: 404 }));
    expect(await sourcesOfPage(page())).toEqual([]);
    const [source] = await sourcesOfPage(page('?files=run/7/tree.vtp'));
    await expect(source!.read()).rejects.toThrow('run/7/tree.vtp: the server answered 404');
    expect(await sourcesOfPage(new URL('file:///somewhere/index.html'))).toEqual([]);
  });
});
