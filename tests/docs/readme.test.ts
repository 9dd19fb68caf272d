import { existsSync, mkdtempSync, readFileSync, realpathSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { main } from '../../src/cli/run-command.ts';
import * as library from '../../src/index.ts';

/*
 * The README keeps its word: every example is run in order, in one scratch folder; the table of the spec is the one that
 * the schema gives (UPDATE=1 writes it anew).
 */

const README = new URL('../../README.md', import.meta.url).pathname;
const text = readFileSync(README, 'utf8');

interface Example {
  readonly lines: readonly string[];
  readonly exit: number;
}

/** Fenced blocks of commands; `exit=1` after the language: what the block's last line must end with. */
function examples(): Example[] {
  return [...text.matchAll(/```sh(?: exit=(\d+))?\n([\s\S]*?)```/g)].map((match) => ({
    exit: Number(match[1] ?? 0),
    lines: match[2]!.trim().split('\n'),
  }));
}

async function runLine(line: string): Promise<number> {
  const [command, target] = line.split(' > ');
  const words = command!.trim().split(/\s+/);
  expect(words.slice(0, 2)).toEqual(['npx', 'vesselwright']);
  let out = '';
  const io = {
    out: (words: string) => {
      out += words;
    },
    err: () => {},
    progress: () => {},
    untilInterrupted: async () => {},
    temporary: () => {},
    commit: (work: () => void) => work(),
  };
  const code = await main(words.slice(2), io as unknown as Parameters<typeof main>[1]);
  if (target !== undefined) writeFileSync(target.trim(), out);
  return code;
}

describe('README', () => {
  const before = process.cwd();
  let scratch = '';
  beforeAll(() => {
    scratch = realpathSync(mkdtempSync(join(tmpdir(), 'readme-')));
    process.chdir(scratch);
    // Files that the reader is told to save.
    for (const [, name, content] of text.matchAll(/```json (\S+)\n([\s\S]*?)```/g)) writeFileSync(name!, content!);
  });
  afterAll(() => {
    process.chdir(before);
    rmSync(scratch, { recursive: true, force: true });
  });

  it('has examples', () => expect(examples().length).toBeGreaterThanOrEqual(5));

  for (const [k, example] of examples().entries()) {
    it(`example ${k + 1}: ${example.lines[0]}`, async () => {
      for (const [i, line] of example.lines.entries()) {
        const last = i === example.lines.length - 1;
        expect(await runLine(line), line).toBe(last ? example.exit : 0);
      }
    });
  }

  it('has a library example that runs', () => {
    const blocks = [...text.matchAll(/```js\n([\s\S]*?)```/g)];
    expect(blocks).toHaveLength(1);
    const code = blocks[0]![1]!.replace(/import (\{[^}]*\}) from 'vesselwright';/, 'const $1 = library;');
    const said: unknown[][] = [];
    new Function('library', 'console', code)(library, { log: (...words: unknown[]) => said.push(words) });
    expect(said).toHaveLength(1);
    expect(said[0]![0]).toBeGreaterThan(99);
    expect(said[0]![1]).toBe(true);
  });

  it('shows the spec table that the schema gives', () => {
    const marked = /<!-- spec-table -->\n[\s\S]*?<!-- \/spec-table -->/;
    const wanted = `<!-- spec-table -->\n${library.specTable().trim()}\n<!-- /spec-table -->`;
    if (process.env.UPDATE === '1')
      writeFileSync(
        README,
        text.replace(marked, () => wanted),
      );
    else expect(marked.exec(text)?.[0]).toBe(wanted);
  });

  it('points at pictures and files that are there', () => {
    const links = [...text.matchAll(/\]\(([^)#:]+)\)/g)].map((match) => match[1]!);
    expect(links.length).toBeGreaterThan(1);
    for (const link of links) expect(existsSync(join(README, '..', link)), link).toBe(true);
  });

  it('carries the caution', () => expect(text).toContain('not for diagnosis or treatment'));
});
