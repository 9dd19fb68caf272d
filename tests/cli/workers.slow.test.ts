import { readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { buildProgram, ProgramScratch } from '../support/program.ts';

/* The tree is the same whoever looked for places, and however many of them came to harm. */

let program: ProgramScratch;
beforeAll(() => {
  buildProgram();
  program = new ProgramScratch();
  for (const [name, count] of [
    ['large', 10_000],
    ['smaller', 9000],
    // From 40,000 rows on, refinement looks for better places in all threads too.
    ['largest', 22_000],
  ] as const) {
    const spec = {
      name,
      seed: 'crew',
      tissue: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [15, 12, 10] },
      trees: [
        {
          name: 'supply',
          inlet: { position_mm: [-15, 0, 0], direction: [1, 0, 0], pressure_mmHg: 60, flow_mL_min: 10 },
          terminals: { count },
        },
      ],
      sizing: { rule: 'junction-exponent', junction_exponent: 3, inlet_radius_um: 1150 },
      clearance: { gap_um: 0 },
    };
    writeFileSync(program.scratch.path(`${name}.json`), JSON.stringify(spec));
  }
});
afterAll(() => program.scratch.remove());

const tree = (run: string) => readFileSync(program.scratch.path(run, 'tree.vtp'));

async function grow(spec: string, workers: number, refine: string, run: string, env: Record<string, string> = {}) {
  const argv = ['grow', `${spec}.json`, '--refine', refine, '--workers', String(workers), '--out', run];
  const { code, out, err } = await program.run(argv, env);
  expect({ code, err }, out).toEqual({ code: 0, err: '' });
  return tree(run);
}

/**
 * Environment in which each member of a crew runs some code as it starts, and leaves a file that tells it did; other
 * threads of the program do not.
 */
function troubled(name: string, code: string): Record<string, string> {
  writeFileSync(
    program.scratch.path(`${name}.mjs`),
    `import { writeFileSync } from 'node:fs';
import { isMainThread, threadId, workerData } from 'node:worker_threads';
const tell = () => writeFileSync(new URL('./${name}-' + threadId, import.meta.url), '');
if (!isMainThread && workerData?.control instanceof SharedArrayBuffer) { ${code} }
`,
  );
  return { NODE_OPTIONS: `--import=${program.scratch.path(`${name}.mjs`)}` };
}
const told = (name: string) => program.scratch.names().filter((file) => file.startsWith(`${name}-`)).length;

describe('threads that grow', () => {
  let alone: Buffer;
  beforeAll(async () => {
    alone = await grow('large', 1, 'none', 'alone');
  });

  test.each([2, 3, 5])('%i of them: the same bytes as one', async (workers) => {
    const seen = troubled(`seen${workers}`, 'tell();');
    expect((await grow('large', workers, 'none', `by ${workers}`, seen)).equals(alone)).toBe(true);
    expect(told(`seen${workers}`)).toBe(workers - 1);
  });

  test('refined thoroughly after growth by several: the same bytes as by one', async () => {
    const [one, three] = [await grow('smaller', 1, 'thorough', 'one'), await grow('smaller', 3, 'thorough', 'three')];
    expect(three.equals(one)).toBe(true);
    expect(one.equals(tree('alone'))).toBe(false);
  });

  test('refined by several too: the same bytes as by one', async () => {
    const [one, three] = [await grow('largest', 1, 'quick', 'first'), await grow('largest', 3, 'quick', 'third')];
    expect(three.equals(one)).toBe(true);
  });

  test('a member that cannot start leaves its part to the others', async () => {
    const env = troubled('stillborn', "tell(); throw new Error('cannot start');");
    expect((await grow('large', 3, 'none', 'without', env)).equals(alone)).toBe(true);
    expect(told('stillborn')).toBe(2);
  });

  test.each([0, 20_000])(
    'a member that fails in the middle of its work, after %i roots, is done without',
    async (after) => {
      const code = `const cbrt = Math.cbrt;
  let roots = 0;
  Math.cbrt = (x) => {
    if (++roots <= ${after}) return cbrt(x);
    tell();
    throw new RangeError('no memory');
  };`;
      const env = troubled(`failing${after}`, code);
      expect((await grow('large', 3, 'none', `failing ${after}`, env)).equals(alone)).toBe(true);
      expect(told(`failing${after}`)).toBeGreaterThan(0);
    },
  );

  test('a member that ends with work in hand is done without, after some waiting', async () => {
    // In a thread of its own this ends the thread, as running out of memory does.
    const code = `const cbrt = Math.cbrt;
  let roots = 0;
  Math.cbrt = (x) => {
    if (++roots <= 20_000) return cbrt(x);
    tell();
    process.exit(1);
  };`;
    const env = troubled('ending', code);
    expect((await grow('large', 3, 'none', 'ending', env)).equals(alone)).toBe(true);
    expect(told('ending')).toBeGreaterThan(0);
  });
});
