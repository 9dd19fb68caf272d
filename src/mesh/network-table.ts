import { InvariantError } from '../core/errors.ts';
import type { FlowField, Forest, TreeKind } from '../tree/forest.ts';
import { tubeLength, vesselOfRow } from '../tree/vessels.ts';

/** One tube of the network that was meshed, `from` upstream and `to` downstream. */
export interface NetworkRow {
  /** Vessel number. */
  readonly segment: number;
  /** Node numbers: rows of the forest, or of the whole forest where a part was meshed. */
  readonly from: number;
  readonly to: number;
  /** m */
  readonly start: readonly [number, number, number];
  /** m */
  readonly end: readonly [number, number, number];
  /** m */
  readonly radius: number;
  /** m */
  readonly length: number;
  /** m that resist flow in the network of effective lengths, or null where they are not known. */
  readonly effectiveLength: number | null;
  /** m³/s from `from` to `to`, > 0. */
  readonly flow: number;
  /** Pa at `from` and at `to`. */
  readonly pressures: readonly [number, number];
}

export interface NetworkTableOptions {
  /** One a tree; `supply` where left out. */
  readonly kinds?: readonly TreeKind[] | undefined;
  /** (n) row of the whole forest that each row stands for. */
  readonly source?: ArrayLike<number> | undefined;
  /** (n) vessel number that each row is called by. */
  readonly vesselNumbers?: ArrayLike<number> | undefined;
  /** (n) m, effective lengths. */
  readonly effectiveLengths?: ArrayLike<number> | undefined;
}

/**
 * The one-dimensional network behind a mesh, a row a tube.
 *
 * @param field solved on `forest`
 * @throws InvariantError where the field belongs to another forest
 */
export function networkTable(forest: Forest, field: FlowField, options: NetworkTableOptions = {}): NetworkRow[] {
  if (field.forest !== forest) throw new InvariantError('networkTable: the field was solved on another forest');
  const rows: NetworkRow[] = [];
  const place = (row: number): [number, number, number] => [
    forest.position[3 * row]!,
    forest.position[3 * row + 1]!,
    forest.position[3 * row + 2]!,
  ];
  for (let row = 0; row < forest.count; row++) {
    const parent = forest.parent[row]!;
    if (parent < 0) continue;
    const drain = options.kinds?.[forest.tree[row]!] === 'drain';
    const from = drain ? row : parent;
    const to = drain ? parent : row;
    rows.push({
      segment: options.vesselNumbers?.[row] ?? vesselOfRow(forest, row),
      from: options.source?.[from] ?? from,
      to: options.source?.[to] ?? to,
      start: place(from),
      end: place(to),
      radius: forest.radius[row]!,
      length: tubeLength(forest, row),
      effectiveLength: options.effectiveLengths?.[row] ?? null,
      flow: forest.flow[row]!,
      pressures: [field.pressure[from]!, field.pressure[to]!],
    });
  }
  return rows;
}
