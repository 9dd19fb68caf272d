import { InvariantError } from '../core/errors.ts';
import type { FlowField, Forest } from '../tree/forest.ts';
import type { LumenMesh } from './lumen.ts';

/** What a flow solver is told at one cap. */
export interface BoundaryRow {
  readonly patch: string;
  readonly type: 'inlet' | 'outlet';
  /** m */
  readonly radius: number;
  /** m */
  readonly centre: readonly [number, number, number];
  /** Unit length, out of the lumen. */
  readonly normal: readonly [number, number, number];
  /** m³/s, magnitude. */
  readonly flow: number;
  /** Pa, the network's at the node of the cap. */
  readonly pressure: number;
  /** m/s, flow over πr². */
  readonly velocity: number;
  /** By diameter. */
  readonly reynolds: number;
  /**
   * Pa·s/m³ between the cap and the ends of what was cut off behind it; 0 where the network itself ends here, null at a
   * tree's root. With it, the pressure behind is `pressure − resistance · flow` for an outlet of a supply tree.
   */
  readonly resistance: number | null;
  readonly tree: number;
  /** Vessel number. */
  readonly vessel: number;
}

/**
 * Boundary values of every cap of a lumen mesh.
 *
 * @param field       solved on `forest`, the one that was meshed
 * @param density     kg/m³
 * @param resistances (n) Pa·s/m³ cut off behind each row (see cut-forest.ts); nothing was cut where left out
 * @throws InvariantError where the field belongs to another forest
 */
export function boundaryTable(
  mesh: LumenMesh,
  forest: Forest,
  field: FlowField,
  density: number,
  resistances?: ArrayLike<number> | undefined,
): BoundaryRow[] {
  if (field.forest !== forest) throw new InvariantError('boundaryTable: the field was solved on another forest');
  const rows: BoundaryRow[] = [];
  for (const patch of mesh.patches) {
    if (patch.kind === 'wall') continue;
    const { row } = patch;
    const root = forest.parent[row]! < 0;
    // A root repeats its vessel's radius, flow and viscosity.
    const r = patch.radius;
    const flow = forest.flow[row]!;
    rows.push({
      patch: patch.name,
      type: patch.kind,
      radius: r,
      centre: patch.centre,
      normal: patch.normal,
      flow,
      pressure: field.pressure[row]!,
      velocity: flow / (Math.PI * r * r),
      reynolds: (2 * density * flow) / (Math.PI * r * field.viscosity[row]!),
      resistance: root ? null : (resistances?.[row] ?? 0),
      tree: patch.tree,
      vessel: patch.vessel,
    });
  }
  return rows;
}
