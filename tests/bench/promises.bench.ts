/*
 * Every promise in every cell: 5 tissues × 3 sizing rules × 1, 5 and 10 % vessel volume × seeds. A table of the share of
 * terminals served, the vessel volume reached, and how many things the check found; then what it found.
 *   node tests/bench/run.mjs promises [-- key=value …]
 *     tissue, rule, volume   one or several, with commas: tissue=bean,holed rule=least-power volume=5
 *     seeds=10 terminals=5000 search=1000 refine=none
 *     quick                  2 tissues, 200 terminals, 1 seed
 *   node tests/bench/run.mjs promises -- tissue=hollow,bean,holed volume=5 terminals=20000 seeds=1
 * How wide vessels must be for a volume is searched for with `search` terminals and then used at the size asked for, so
 * that the volume reached is somewhat more. Exit code 1 if anything is found, or less than 99.5 % served at 1 and 5 %.
 */
import { InputError } from '../../src/core/errors.ts';
import { peakMegabytes, timed } from '../support/figures.ts';
import { type Cell, findSize, RULES, runCell, TISSUES, type TissueName } from '../support/promise-cells.ts';

const words = new Map(process.argv.slice(2).map((word) => word.split('=', 2) as [string, string]));
const quick = words.has('quick');
const list = <T extends string>(key: string, all: readonly T[]): readonly T[] =>
  (words.get(key)?.split(',') as T[] | undefined) ?? all;
const number = (key: string, usual: number): number => Number(words.get(key) ?? usual);

const tissues = list('tissue', (quick ? ['ellipsoid', 'holed'] : Object.keys(TISSUES)) as TissueName[]);
const rules = list('rule', RULES);
const volumes = list('volume', quick ? ['5'] : ['1', '5', '10']).map(Number);
const seeds = number('seeds', quick ? 1 : 10);
const terminals = number('terminals', quick ? 200 : 5000);
const search = number('search', Math.min(terminals, quick ? 200 : 1000));
const refine = words.get('refine') ?? 'none';

console.log(`${terminals} terminals, ${seeds} seeds, refine ${refine}`);
console.log('tissue     rule               wanted   size       served %: least, mean   volume %   found   s a run');
let runs = 0;
let found = 0;
for (const tissue of tissues) {
  for (const rule of rules) {
    for (const percent of volumes) {
      const cell: Cell = { tissue, rule, volume: percent / 100 };
      const size = findSize(cell, search);
      const shares: number[] = [];
      const reached: number[] = [];
      const broken: string[] = [];
      let seconds = 0;
      for (let seed = 1; seed <= seeds; seed++) {
        runs++;
        try {
          const run = timed(() => runCell(cell, size, terminals, String(seed), refine));
          seconds += run.seconds;
          shares.push((100 * run.result.served) / terminals);
          reached.push(100 * run.result.volume);
          broken.push(...run.result.broken.map((what) => `seed ${seed}: ${what}`));
        } catch (error) {
          if (!(error instanceof InputError)) throw error;
          shares.push(0);
          broken.push(`seed ${seed}: refused: ${error.message}`);
        }
      }
      found += broken.length;
      const mean = (values: readonly number[]) => values.reduce((a, b) => a + b, 0) / Math.max(1, values.length);
      console.log(
        `${tissue.padEnd(10)} ${rule.padEnd(18)} ${String(percent).padStart(3)} %    ${String(size).padEnd(10)} ${Math.min(...shares).toFixed(2)}, ${mean(shares).toFixed(2)}         ${mean(reached).toFixed(2)}      ${broken.length}       ${(seconds / seeds).toFixed(1)}`,
      );
      for (const what of broken) console.log(`    ${what}`);
      if (broken.length > 0 || (percent <= 5 && Math.min(...shares) < 99.5)) process.exitCode = 1;
    }
  }
}
console.log(`${runs} runs, ${found} promises broken, peak ${peakMegabytes()}`);
