import { InvariantError } from '../core/errors.ts';
import type { FlowField, Forest, TreeKind } from '../tree/forest.ts';
import { GrowingRows } from './growing-column.ts';
import type { LumenVolume } from './lumen-volume.ts';
import { type NodeRegion, solveNodeFlow } from './node-flow.ts';
import { sectionFlux, stripFlux } from './section-flux.ts';
import { cutPrism } from './tetrahedra-of.ts';

/** Blood flow at the points of a volume mesh. */
export interface VolumeFlow {
  /** (3v) m/s */
  readonly velocity: Float64Array;
  /** (v) Pa */
  readonly pressure: Float64Array;
  /** Largest |∫ φ ∇·u| of all nodes over the largest ∫ φ |∇u| of the same node, φ the linear hat of a point. */
  readonly divergence: number;
}

/**
 * The network's flow drawn out to a volume mesh: in tubes the parabola of developed laminar flow (Hagen–Poiseuille),
 * scaled so that taken linear over the cells it carries just the vessel's flow, on average along a strip and at caps; in nodes what goes on from
 * them (node-flow.ts); zero at the wall. Pressure runs linearly along each vessel.
 *
 * @param field solved on `forest`, the one that was meshed
 * @param kinds one a tree
 * @throws InvariantError where the field belongs to another forest
 * Cost:   per node some tenths of a second at 24 around.
 */
export function solveVolumeFlow(
  volume: LumenVolume,
  forest: Forest,
  field: Pick<FlowField, 'forest' | 'pressure'>,
  kinds: readonly TreeKind[],
): VolumeFlow {
  if (field.forest !== forest) throw new InvariantError('solveVolumeFlow: the field was solved on another forest');
  const points = volume.row.length;
  const pressure = new Float64Array(points);
  for (let v = 0; v < points; v++) {
    const row = volume.row[v]!;
    const above = field.pressure[forest.parent[row]!]!;
    pressure[v] = above + (field.pressure[row]! - above) * volume.along[v]!;
  }
  const velocity = new Float64Array(3 * points);
  /** (v) (a² − ρ²)/4 at points of tubes, 0 at the wall. */
  const profile = new Float64Array(points);
  const tubes = tubeAxes(volume, forest);
  flowInTubes(volume, forest, kinds, tubes, velocity, profile);
  const divergence = flowInNodes(volume, velocity, profile);
  return { velocity, pressure, divergence };
}

interface TubeAxes {
  /** (3n) unit vectors. */
  readonly axis: Float64Array;
  /** (n) m, of the rims' corners. */
  readonly corner: Float64Array;
}

function tubeAxes({ sections, position }: LumenVolume, forest: Forest): TubeAxes {
  const axis = new Float64Array(3 * forest.count);
  const corner = new Float64Array(forest.count);
  for (let row = 0; row < forest.count; row++) {
    const parent = forest.parent[row]!;
    if (parent < 0) continue;
    const d = [0, 1, 2].map((k) => forest.position[3 * row + k]! - forest.position[3 * parent + k]!);
    const length = Math.sqrt(d[0]! * d[0]! + d[1]! * d[1]! + d[2]! * d[2]!);
    for (let k = 0; k < 3; k++) axis[3 * row + k] = d[k]! / length;
  }
  const { around } = sections.disc;
  for (let s = 0; s < sections.count; s++) {
    const row = sections.row[s]!;
    if (corner[row]! > 0) continue;
    const a = 3 * sections.rim[s]!;
    const b = 3 * (sections.rim[s]! + 1);
    const x = position[a]! - position[b]!;
    const y = position[a + 1]! - position[b + 1]!;
    const z = position[a + 2]! - position[b + 2]!;
    corner[row] = Math.sqrt(x * x + y * y + z * z) / (2 * Math.sin(Math.PI / around));
  }
  return { axis, corner };
}

function flowInTubes(
  volume: LumenVolume,
  forest: Forest,
  kinds: readonly TreeKind[],
  { axis, corner }: TubeAxes,
  velocity: Float64Array,
  profile: Float64Array,
): void {
  const { nodes, position, row: rows } = volume;
  const { sections } = volume;
  const mean = stripFlux(sections.disc);
  const ends = new Uint8Array(forest.count).fill(1);
  for (let i = 0; i < forest.count; i++) if (forest.parent[i]! >= 0) ends[forest.parent[i]!] = 0;
  // Points within tubes come after those of the wall and before those of nodes.
  for (let v = volume.wallPoints; v < nodes.point[0]!; v++) {
    const row = rows[v]!;
    const from = 3 * forest.parent[row]!;
    const [ux, uy, uz] = [axis[3 * row]!, axis[3 * row + 1]!, axis[3 * row + 2]!];
    const x = position[3 * v]! - forest.position[from]!;
    const y = position[3 * v + 1]! - forest.position[from + 1]!;
    const z = position[3 * v + 2]! - forest.position[from + 2]!;
    const s = x * ux + y * uy + z * uz;
    const [px, py, pz] = [x - s * ux, y - s * uy, z - s * uz];
    const a = corner[row]!;
    const height = Math.max(0, a * a - px * px - py * py - pz * pz);
    const way = kinds[forest.tree[row]!] === 'drain' ? -1 : 1;
    const speed = (way * forest.flow[row]! * height) / (mean * a * a * a * a);
    velocity[3 * v] = speed * ux;
    velocity[3 * v + 1] = speed * uy;
    velocity[3 * v + 2] = speed * uz;
    profile[v] = 0.25 * height;
  }
  // Caps carry their flow to the last digit.
  const exact = mean / sectionFlux(sections.disc);
  for (let s = 0; s < sections.count; s++) {
    const row = sections.row[s]!;
    const first = s === 0 || sections.row[s - 1] !== row;
    const last = s + 1 === sections.count || sections.row[s + 1] !== row;
    if (!(first && forest.parent[forest.parent[row]!]! < 0) && !(last && ends[row] === 1)) continue;
    const inside = 3 * sections.inside[s]!;
    for (let i = inside; i < inside + 3 * (sections.disc.points - sections.disc.around); i++) velocity[i]! *= exact;
  }
}

function flowInNodes(volume: LumenVolume, velocity: Float64Array, profile: Float64Array): number {
  const { nodes, position, wallPoints } = volume;
  const local = new Int32Array(volume.row.length).fill(-1);
  const cells = new GrowingRows(1 << 16);
  const points = new GrowingRows(1 << 13);
  let worst = 0;
  for (let i = 0; i < nodes.row.length; i++) {
    cells.count = 0;
    points.count = 0;
    const start = cells.take(4 * (nodes.tetrahedron[i + 1]! - nodes.tetrahedron[i]!));
    cells.values.set(volume.tetrahedron.subarray(4 * nodes.tetrahedron[i]!, 4 * nodes.tetrahedron[i + 1]!), start);
    for (let t = nodes.prism[i]!; t < nodes.prism[i + 1]!; t++) cutPrism(volume.prism, 6 * t, cells);
    const own = cells.trimmed();
    for (let c = 0; c < own.length; c++) {
      const v = own[c]!;
      if (local[v]! < 0) {
        local[v] = points.count;
        points.push(v);
      }
      own[c] = local[v]!;
    }
    const region = regionOf(volume, points, own, i, velocity, profile);
    worst = Math.max(worst, solveNodeFlow(region));
    for (let p = 0; p < points.count; p++) {
      const v = points.values[p]!;
      local[v] = -1;
      if (v < nodes.point[i]!) continue;
      for (let k = 0; k < 3; k++) velocity[3 * v + k] = region.velocity[3 * p + k]!;
    }
  }
  return position.length > 3 * wallPoints ? worst : 0;
}

function regionOf(
  volume: LumenVolume,
  points: GrowingRows,
  cells: Int32Array,
  node: number,
  velocity: Float64Array,
  profile: Float64Array,
): NodeRegion {
  const vertices = points.count;
  const { nodes } = volume;
  const firstOwn = nodes.point[node]!;
  const region: NodeRegion = {
    vertices,
    position: new Float64Array(3 * vertices),
    cells,
    kind: new Uint8Array(vertices),
    profile: new Float64Array(vertices),
    layered: nodes.prism[node]! < nodes.prism[node + 1]!,
    velocity: new Float64Array(3 * vertices),
  };
  const sections: number[] = [];
  for (let p = 0; p < vertices; p++) {
    const v = points.values[p]!;
    for (let k = 0; k < 3; k++) {
      region.position[3 * p + k] = volume.position[3 * v + k]!;
      region.velocity[3 * p + k] = velocity[3 * v + k]!;
    }
    region.profile[p] = profile[v]!;
    if (v < volume.wallPoints) region.kind[p] = 1;
    else if (v < firstOwn) {
      // A node has each of its vessels once.
      const row = volume.row[v]!;
      if (!sections.includes(row)) sections.push(row);
      region.kind[p] = 2 + sections.indexOf(row);
    }
  }
  return region;
}
