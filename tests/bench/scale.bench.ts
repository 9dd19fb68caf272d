/*
 * All that follows growth, on a tree of any size that was never grown (tests/support/bisected-tree.ts): freezing, the flow
 * solution, orders, the check, tree.vtp to the disk and back, and the report. Prints for each stage the median time by the
 * clock and of the processor, a checksum of what came out, the memory held after it and the most held so far.
 *   node tests/bench/run.mjs scale [-- vessels, default 2e6; quick: 2e4 once]
 * A quarter (2e6) to a third (2e7) of the processor's time is the system's, which hands out memory page by page. Where the
 * C library is glibc 2.35 or newer, GLIBC_TUNABLES=glibc.malloc.hugetlb=1 in the environment makes pages large: at 2e6 all
 * stages together then took 5.9 and 7.6 s against 10.2 and 10.8 s, one run after the other.
 */
import { mkdtempSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { checkTree } from '../../src/check/check-tree.ts';
import { measurePower } from '../../src/flow/power.ts';
import { solveFlow } from '../../src/flow/solve.ts';
import { VTP } from '../../src/formats/tree/vtp.ts';
import { withSource, writeContent } from '../../src/node/large-files.ts';
import { buildReport } from '../../src/report/build.ts';
import { renderReport } from '../../src/report/render.ts';
import { promiseLines } from '../../src/run-report.ts';
import { specToJson } from '../../src/spec/write.ts';
import type { Forest, TreeRecord } from '../../src/tree/forest.ts';
import { freezeForest } from '../../src/tree/freeze.ts';
import { strahlerOrders } from '../../src/tree/strahler.ts';
import { countVessels } from '../../src/tree/vessels.ts';
import { bisectBox, shuffleRows } from '../support/bisected-tree.ts';

const quick = process.argv.includes('quick');
const VESSELS = quick ? 2e4 : Number(process.argv[2] ?? 2e6);
const ROUNDS = quick || VESSELS > 5e6 ? 1 : 3;

type Column = Float64Array | Int32Array;

/** FNV-1a over the 32-bit words of columns. */
function checksum(...columns: readonly unknown[]): string {
  let hash = 0x811c9dc5;
  for (const column of columns as Column[]) {
    const words = new Uint32Array(column.buffer, column.byteOffset, column.byteLength / 4);
    for (let i = 0; i < words.length; i++) hash = Math.imul(hash ^ words[i]!, 0x01000193) >>> 0;
  }
  return hash.toString(16).padStart(8, '0');
}

function median(values: number[]): number {
  return values.sort((a, b) => a - b)[values.length >> 1]!;
}

const gigabytes = (bytes: number): string => `${(bytes / 1e9).toFixed(2)} GB`;
let whole = 0;

/** Runs a stage some times; the result of the last time. */
function stage<T>(name: string, step: () => T, sum: (result: T) => string): T {
  const times: number[] = [];
  const worked: number[] = [];
  let result: T | null = null;
  for (let round = 0; round < ROUNDS; round++) {
    result = null;
    globalThis.gc?.();
    const start = performance.now();
    const before = process.cpuUsage();
    result = step();
    const used = process.cpuUsage(before);
    times.push((performance.now() - start) / 1000);
    worked.push((used.user + used.system) / 1e6);
  }
  const time = median(times);
  whole += time;
  const held = process.memoryUsage().rss;
  const peak = process.resourceUsage().maxRSS * 1024;
  console.log(
    `${name.padEnd(8)} ${time.toFixed(2).padStart(7)} s ${median(worked).toFixed(2).padStart(7)} s   ${sum(result!).padEnd(44)} held ${gigabytes(held)}, most so far ${gigabytes(peak)}`,
  );
  return result!;
}

const sumOf = (forest: Forest): string => checksum(forest.parent, forest.position, forest.radius, forest.flow);

function loose(): { rows: ReturnType<typeof shuffleRows> | null; spec: ReturnType<typeof bisectBox>['spec'] } {
  const { forest, spec } = bisectBox(VESSELS / 2);
  return { rows: shuffleRows(forest), spec };
}

const made = loose();
const { spec } = made;
const forest = stage('freeze', () => freezeForest(made.rows!).forest, sumOf);
made.rows = null;
console.log(`         ${countVessels(forest)} vessels`);
const kinds = spec.trees.map((tree) => tree.kind);
const field = stage(
  'solve',
  () =>
    solveFlow(forest, kinds, {
      rootPressures: spec.trees.map((tree) => tree.inlet.pressure),
      viscosity: spec.blood.viscosity.value,
      density: spec.blood.density,
    }),
  (solved) => checksum(solved.pressure, solved.transit),
);
const order = stage(
  'orders',
  () => strahlerOrders(forest),
  (orders) => `${checksum(orders)}, highest ${orders[0]}`,
);
const record: TreeRecord = {
  forest,
  kinds,
  names: spec.trees.map((tree) => tree.name),
  field,
  order,
  provenance: specToJson(spec),
};
const check = stage(
  'check',
  () => checkTree(record, spec, new Map()),
  ({ promises }) => {
    const count = (held: boolean | null) => promises.filter((promise) => promise.held === held).length;
    return `${count(true)} held, ${count(false)} broken, ${count(null)} not looked at`;
  },
);
const report = stage(
  'report',
  () => {
    const power = measurePower(forest, spec.blood.viscosity.value, spec.blood.maintenance);
    return buildReport({ program: 'bench', record, power, tissueVolume: null, promises: promiseLines(check) });
  },
  ({ cost, orders }) => `${cost.total_W.toExponential(9)} W, ${orders.length} orders`,
);
stage(
  'page',
  () => renderReport(report),
  (page) => `${page.length} characters`,
);
const encoded = stage(
  'encode',
  () => VTP.encode(record)[0]!.pieces!,
  (pieces) => gigabytes([...pieces].reduce((sum, piece) => sum + piece.length, 0)),
);
const folder = mkdtempSync(join(tmpdir(), 'scale-'));
try {
  const path = join(folder, 'tree.vtp');
  stage(
    'write',
    () => writeContent(path, encoded),
    () => gigabytes(statSync(path).size),
  );
  const back = stage(
    'read',
    () => withSource(path, 'tree.vtp', VTP.decodeSource!).record,
    (got) => `${sumOf(got.forest)}, ${checksum(got.field!.pressure, got.field!.transit)}`,
  );
  console.log(`all      ${whole.toFixed(2).padStart(7)} s`);
  if (sumOf(back.forest) !== sumOf(forest) || !check.held) process.exitCode = 1;
} finally {
  rmSync(folder, { recursive: true, force: true });
}
