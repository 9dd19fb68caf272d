import type { Forest } from '../../src/tree/forest.ts';
import { tubeLength } from '../../src/tree/vessels.ts';

/* What benches print of a forest and of the machine. */

/** FNV-1a over the 32-bit words of a forest's parents and positions. */
export function forestChecksum(forest: Forest): string {
  let hash = 0x811c9dc5;
  for (const column of [forest.parent, forest.position] as unknown as (Int32Array | Float64Array)[]) {
    const words = new Uint32Array(column.buffer, column.byteOffset, column.byteLength / 4);
    for (let i = 0; i < words.length; i++) hash = Math.imul(hash ^ words[i]!, 0x01000193) >>> 0;
  }
  return hash.toString(16).padStart(8, '0');
}

/** m³ of all tubes taken as plain cylinders. */
export function vesselVolume(forest: Forest): number {
  let volume = 0;
  for (let i = 0; i < forest.count; i++) {
    if (forest.parent[i]! >= 0) volume += Math.PI * forest.radius[i]! * forest.radius[i]! * tubeLength(forest, i);
  }
  return volume;
}

/** Σ Q^(2/3) L in m, Q in shares of each tree's whole: the cost of least-power tubes in units of its own. */
export function branchedCost(forest: Forest): number {
  let cost = 0;
  let whole = 1;
  for (let i = 0; i < forest.count; i++) {
    if (forest.parent[i]! < 0) whole = forest.flow[i]!;
    else {
      const part = Math.cbrt(forest.flow[i]! / whole);
      cost += part * part * tubeLength(forest, i);
    }
  }
  return cost;
}

export function median(values: readonly number[]): number {
  return quantile(values, 0.5);
}

/** The value below which a part of the values lies. */
export function quantile(values: readonly number[], part: number): number {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.min(sorted.length - 1, Math.floor(part * sorted.length))]!;
}

/** s of processor time that some work takes, and what it gives. */
export function timed<T>(work: () => T): { seconds: number; result: T } {
  const start = process.cpuUsage();
  const result = work();
  const used = process.cpuUsage(start);
  return { seconds: (used.user + used.system) / 1e6, result };
}

export function peakMegabytes(): string {
  return `${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`;
}
