import { type Children, listChildren } from '../tree/children.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { countVessels } from '../tree/vessels.ts';
import { CAUTION } from './caution.ts';
import type { ReportInput } from './input.ts';
import { measureAngles, measureHorton, measureOrders } from './morphometry.ts';
import type { Report, TerritorySummary, TreeSummary } from './report.ts';
import { resourcesOf } from './resources.ts';

/** Makes the report of a tree; `JSON.stringify` of it is report.json. Cost: O(n). */
export function buildReport(input: ReportInput): Report {
  const { record, power, tissueVolume } = input;
  const { forest } = record;
  const children = listChildren(forest);
  let terminals = 0;
  let junctions = 0;
  let bends = 0;
  for (let i = 0; i < forest.count; i++) {
    if (forest.parent[i]! < 0) continue;
    const count = children.start[i + 1]! - children.start[i]!;
    if (count === 0) terminals++;
    else if (count === 1) bends++;
    else junctions++;
  }
  const orders = measureOrders(record, children);
  const provenance = parseProvenance(record.provenance);
  return {
    format_version: 1,
    program: input.program,
    caution: CAUTION,
    name: nameOf(provenance),
    counts: { trees: record.kinds.length, vessels: countVessels(forest), terminals, junctions, bends },
    cost: { pumping_W: power.pumping, maintenance_W: power.maintenance, total_W: power.total },
    volumes: {
      vessel_m3: power.volume,
      tissue_m3: tissueVolume,
      fraction: tissueVolume === null ? null : power.volume / tissueVolume,
    },
    trees: record.kinds.map((_, t) => summariseTree(record, children, t, input.askedPressures?.[t] ?? null)),
    promises: input.promises,
    orders,
    angles: measureAngles(record, children),
    horton: measureHorton(orders),
    notes: input.notes ?? [],
    provenance,
    resources: resourcesOf(input.resources),
  };
}

function summariseTree(record: TreeRecord, children: Children, t: number, asked: number | null): TreeSummary {
  const { forest, field } = record;
  const root = forest.treeStart[t]!;
  const end = forest.treeStart[t + 1]!;
  let terminals = 0;
  let carried = 0;
  const range = () => ({ min: Infinity, sum: 0, max: -Infinity });
  const pressure = range();
  const transit = range();
  for (let i = root + 1; i < end; i++) {
    if (children.start[i + 1] !== children.start[i]) continue;
    terminals++;
    if (field === null) continue;
    const q = forest.flow[i]!;
    carried += q;
    for (const [of, value] of [
      [pressure, field.pressure[i]!],
      [transit, field.transit[i]!],
    ] as const) {
      of.min = Math.min(of.min, value);
      of.max = Math.max(of.max, value);
      of.sum += q * value;
    }
  }
  return {
    name: record.names[t]!,
    kind: record.kinds[t]!,
    vessels: end - root - 1,
    terminals,
    root_flow_m3_s: forest.flow[root]!,
    root_radius_m: forest.radius[root]!,
    root_pressure_Pa: field === null ? null : field.pressure[root]!,
    terminal_pressure:
      field === null
        ? null
        : { min_Pa: pressure.min, mean_Pa: pressure.sum / carried, max_Pa: pressure.max, asked_Pa: asked },
    transit: field === null ? null : { min_s: transit.min, mean_s: transit.sum / carried, max_s: transit.max },
    territory: summariseTerritories(record, children, t),
  };
}

/** Null where a tree's terminals have none. */
function summariseTerritories(record: TreeRecord, children: Children, t: number): TerritorySummary | null {
  const { forest, territory } = record;
  if (!territory) return null;
  const sizes: number[] = [];
  for (let i = forest.treeStart[t]! + 1; i < forest.treeStart[t + 1]!; i++) {
    if (children.start[i + 1] === children.start[i] && territory[i]! > 0) sizes.push(territory[i]!);
  }
  if (sizes.length === 0) return null;
  const sorted = Float64Array.from(sizes).sort();
  const n = sorted.length;
  let mean = 0;
  for (const size of sorted) mean += size / n;
  let squares = 0;
  for (const size of sorted) squares += (size - mean) * (size - mean);
  return {
    min_m3: sorted[0]!,
    median_m3: 0.5 * (sorted[(n - 1) >> 1]! + sorted[n >> 1]!),
    max_m3: sorted[n - 1]!,
    variation: Math.sqrt(squares / n) / mean,
  };
}

/** The spec as an object, or as the text it was where it is no JSON. */
function parseProvenance(text: string | null): unknown {
  if (text === null) return null;
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}

function nameOf(provenance: unknown): string | null {
  const name = typeof provenance === 'object' && provenance !== null && 'name' in provenance ? provenance.name : null;
  return typeof name === 'string' && name !== '' ? name : null;
}
