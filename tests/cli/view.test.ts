import { existsSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { makeScratch, runCli, type Scratch, tinySpec } from '../support/run-cli.ts';

/* The viewer itself is built by `npm run build`, and tested in a browser elsewhere. */
const BUILT = existsSync(new URL('../../dist/viewer/index.html', import.meta.url));

let scratch: Scratch;
let run: string;
beforeAll(async () => {
  scratch = makeScratch();
  writeFileSync(scratch.path('spec.json'), tinySpec());
  run = scratch.path('run');
  await runCli(['grow', scratch.path('spec.json'), '--out', run]);
});
afterAll(() => scratch.remove());

describe.skipIf(!BUILT)('view', () => {
  test('prints the address, serves the runs until Ctrl-C, and ends with 0', async () => {
    await runCli(['export', run, '--to', scratch.path('tree.json')]);
    let runs: { name: string; tree: string }[] = [];
    let address = '';
    const { code, err } = await runCli(['view', run, scratch.path('tree.json')], async (out) => {
      address = out.split('\n')[0]!;
      runs = (await (await fetch(`${address}runs.json`)).json()) as typeof runs;
      expect((await fetch(address)).status).toBe(200);
    });
    expect({ code, err }).toEqual({ code: 0, err: '' });
    expect(address).toMatch(/^http:\/\/127\.0\.0\.1:\d+\/$/);
    expect(runs.map(({ name, tree }) => [name, tree])).toEqual([
      ['run', 'tree.vtp'],
      ['tree.json', 'tree.json'],
    ]);
    await expect(fetch(address)).rejects.toThrow();
  });

  test('a port that is taken: exit 2', async () => {
    const server = createServer();
    await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
    const { port } = server.address() as { port: number };
    const { code, err } = await runCli(['view', run, '--port', String(port)]);
    await new Promise((done) => server.close(done));
    expect(code).toBe(2);
    expect(err).toBe(`--port: got ${port}, which is taken, expected a free one, or 0 to choose one\n`);
  });

  test('a tree of two files is not opened, and what to do is said', async () => {
    await runCli(['export', run, '--to', scratch.path('two.csv')]);
    const { code, err } = await runCli(['view', scratch.path('two.csv')]);
    expect(code).toBe(2);
    expect(err).toMatch(/two\.csv: got a tree of several files.*vesselwright export/);
  });
});
