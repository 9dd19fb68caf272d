import { InvariantError, inputError } from '../core/errors.ts';
import { JunctionShape } from '../mesh/junction-shape.ts';
import type { LumenMesh, LumenProblem } from '../mesh/lumen.ts';
import { LUMEN_DEFAULTS } from '../mesh/lumen-plan.ts';
import { layOutTubes } from '../mesh/tube-layout.ts';
import { listChildren } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import { vesselOfRow } from '../tree/vessels.ts';
import { CELL_KINDS, scaledJacobian } from './cell-shape.ts';
import { NodeFiller, type NodeSurface } from './fill-node.ts';
import { addSections, fillTubes, sectionPoint, type TubeSections } from './fill-tubes.ts';
import { GrowingRows } from './growing-column.ts';
import { GrowingVolume } from './growing-volume.ts';
import type { LumenVolume, NodeList, SectionList } from './lumen-volume.ts';
import { sortNodeWalls } from './node-walls.ts';
import { buildSectionDisc } from './section-disc.ts';

export interface VolumeOptions {
  /** Layers of prisms along the wall, 0 to 20; default 3. */
  readonly layers?: number | undefined;
  /** Thickness of a layer over that of the next one towards the wall, 1 to 3; default 1.2. */
  readonly layerGrowth?: number | undefined;
  /** As the surface was built with. */
  readonly axialStretch?: number | undefined;
  /** (n) as the surface was built with. */
  readonly vesselNumbers?: ArrayLike<number> | undefined;
}

/** Scaled Jacobian of cells in tubes for which a node gives up its layers, and how often more may. */
const POOR = 0.03;
const TRIES = 4;

export const VOLUME_DEFAULTS = { layers: 3, layerGrowth: 1.2 } as const;

/**
 * Fills a lumen surface: prisms in layers along the wall, prisms in the tubes (tetrahedra and pyramids where they meet the
 * layers), tetrahedra in the nodes. The wall's faces are the surface's triangles; at the caps, whose plane and rim are the
 * surface's, layers end in quadrilaterals and the core in triangles of its own (without layers, in the surface's).
 *
 * @param mesh as `buildLumen` made it of this forest
 * @throws InputError for options out of range
 * Cost:   per vessel, O(length / radius · around²); per node some hundredths of a second at 24 around.
 */
export function buildVolume(mesh: LumenMesh, forest: Forest, options: VolumeOptions = {}): LumenVolume {
  const layers = options.layers ?? VOLUME_DEFAULTS.layers;
  const growth = options.layerGrowth ?? VOLUME_DEFAULTS.layerGrowth;
  if (!(Number.isInteger(layers) && layers >= 0 && layers <= 20))
    throw inputError('out-of-range', 'layers', `got ${layers}, expected a whole number from 0 to 20`);
  if (!(growth >= 1 && growth <= 3)) throw inputError('out-of-range', 'layerGrowth', `got ${growth}, expected 1 to 3`);
  const numbers = Int32Array.from(
    options.vesselNumbers ?? Int32Array.from({ length: forest.count }, (_, row) => vesselOfRow(forest, row)),
  );
  const { around } = mesh;
  const children = listChildren(forest);
  const spacing = 0.99 * 2 * Math.sin(Math.PI / around) * (options.axialStretch ?? LUMEN_DEFAULTS.axialStretch);
  const layout = layOutTubes(forest, children, new JunctionShape(), around, spacing, []);
  const disc = buildSectionDisc(around, layers, growth);
  const out = new GrowingVolume(8 * (mesh.position.length / 3));
  const pointOf = addWall(out, mesh);
  const wallPoints = out.points;
  const sections = addSections(out, mesh, forest, layout, disc);
  if (sections.rim.some((rim, row) => rim >= 0 && mesh.row[rim] !== row))
    throw new InvariantError('buildVolume: the surface was built of another forest, or with another stretch');
  const walls = sortNodeWalls(mesh, forest, layout, sections.rim);
  const filler = new NodeFiller({ mesh, forest, children, layout, sections, walls, numbers, pointOf });
  const problems: LumenProblem[] = [];
  const nodes = Int32Array.from({ length: forest.count }, (_, row) => row).filter(
    (row) => forest.parent[row]! >= 0 && children.start[row] !== children.start[row + 1],
  );
  const upright = out.position.trimmed();
  const surfaces = Array.from(nodes, (row) => (layers === 0 ? null : filler.layLayers(out, row)));
  const mark = out.mark();
  let bare = findBareNodes(forest, layout.strips, nodes, surfaces);
  for (let tries = 0; ; tries++) {
    nodes.forEach((row) => {
      if (bare[row] === 1) filler.raiseRims(out, row, upright);
    });
    fillTubes(out, forest, layout, numbers, sections, layers === 0 ? new Uint8Array(forest.count) : bare);
    const folded = layers === 0 ? new Set<number>() : foldedTubes(out, forest, bare);
    if (folded.size === 0 || tries === TRIES) break;
    // Rims that lean spoil the tube's cells: its nodes do without layers.
    nodes.forEach((row, i) => {
      if (folded.has(row)) surfaces[i] = null;
    });
    bare = findBareNodes(forest, layout.strips, nodes, surfaces);
    out.cutBack(mark);
  }
  const list = listNodes(nodes);
  nodes.forEach((row, i) => {
    list.point[i] = out.points;
    list.tetrahedron[i] = out.vesselOfTetrahedron.count;
    list.prism[i] = out.vesselOfPrism.count;
    const naked = bare[row] === 1;
    const least = filler.fill(out, row, naked ? null : surfaces[i]!);
    if (!(least > 0)) problems.push({ row, vessel: numbers[row]!, why: 'cells of this junction are turned over' });
    else if (naked && layers > 0)
      problems.push({ row, vessel: numbers[row]!, why: 'this junction has no layers: they would be folded' });
  });
  problems.push(...turnedOver(out, new Set(problems.map(({ vessel }) => vessel))));
  list.point[nodes.length] = out.points;
  list.tetrahedron[nodes.length] = out.vesselOfTetrahedron.count;
  list.prism[nodes.length] = out.vesselOfPrism.count;
  return {
    position: out.position.trimmed(),
    row: out.row.trimmed(),
    along: out.along.trimmed(),
    tetrahedron: out.tetrahedron.trimmed(),
    pyramid: out.pyramid.trimmed(),
    prism: out.prism.trimmed(),
    vessel: joinRows(out.vesselOfTetrahedron, out.vesselOfPyramid, out.vesselOfPrism),
    ...outerFaces(mesh, forest, layout.strips, sections, pointOf),
    patches: mesh.patches,
    wallPoints,
    sections: listSections(forest, layout.strips, sections),
    nodes: list,
    layers,
    layerGrowth: growth,
    problems,
  };
}

/** Nodes with layers at the ends of tubes that have badly shaped cells. */
function foldedTubes(out: GrowingVolume, forest: Forest, bare: Uint8Array): Set<number> {
  const rows = new Set<number>();
  const position = out.position.values;
  for (const kind of CELL_KINDS) {
    const { values, count } = out[kind.name];
    for (let at = 0; at < count; at += kind.size) {
      const row = out.row.values[values[at]!]!;
      const parent = forest.parent[row]!;
      if (bare[row] === 1 && bare[parent] === 1) continue;
      if (!(scaledJacobian(position, values, at, kind) > POOR)) rows.add(row).add(parent);
    }
  }
  for (const row of rows) if (bare[row] === 1) rows.delete(row);
  return rows;
}

/** Vessels, not told of before, some of whose cells beyond tetrahedra are turned over: rims may have leant too far. */
function turnedOver(out: GrowingVolume, told: Set<number>): LumenProblem[] {
  const rowOf = new Map<number, number>();
  for (const kind of CELL_KINDS.slice(1)) {
    const cells = kind.name === 'prism' ? out.prism : out.pyramid;
    const vessels = kind.name === 'prism' ? out.vesselOfPrism : out.vesselOfPyramid;
    for (let at = 0; at < cells.count; at += kind.size) {
      const vessel = vessels.values[at / kind.size]!;
      if (told.has(vessel) || scaledJacobian(out.position.values, cells.values, at, kind) > 0) continue;
      told.add(vessel);
      rowOf.set(vessel, out.row.values[cells.values[at]!]!);
    }
  }
  return [...rowOf].map(([vessel, row]) => ({ row, vessel, why: 'cells of this vessel are turned over' }));
}

function listNodes(row: Int32Array): NodeList {
  const runs = () => new Int32Array(row.length + 1);
  return { row, point: runs(), tetrahedron: runs(), prism: runs() };
}

/** (n) 1 at nodes without layers: where they would be folded, and across rims that two nodes share. */
function findBareNodes(
  forest: Forest,
  strips: Int32Array,
  nodes: Int32Array,
  surfaces: readonly (NodeSurface | null)[],
): Uint8Array {
  const bare = new Uint8Array(forest.count);
  nodes.forEach((row, i) => {
    if (surfaces[i] === null) bare[row] = 1;
  });
  for (let spread = true; spread; ) {
    spread = false;
    for (const row of nodes) {
      const parent = forest.parent[row]!;
      if (strips[row] !== 0 || bare[row] === bare[parent]) continue;
      bare[row] = 1;
      bare[parent] = 1;
      spread = true;
    }
  }
  return bare;
}

/** Adds the points of the wall; returns each corner's point, −1 for corners within caps. */
function addWall(out: GrowingVolume, mesh: LumenMesh): Int32Array {
  const { position, triangle, patch } = mesh;
  const pointOf = new Int32Array(position.length / 3).fill(-1);
  for (let i = 0; i < triangle.length; i++) if (patch[Math.floor(i / 3)] === 0) pointOf[triangle[i]!] = 0;
  for (let v = 0; v < pointOf.length; v++) {
    if (pointOf[v]! < 0) continue;
    pointOf[v] = out.addPoint(
      position[3 * v]!,
      position[3 * v + 1]!,
      position[3 * v + 2]!,
      mesh.row[v]!,
      mesh.along[v]!,
    );
  }
  return pointOf;
}

function joinRows(...columns: readonly GrowingRows[]): Int32Array {
  const out = new Int32Array(columns.reduce((sum, { count }) => sum + count, 0));
  let at = 0;
  for (const { values, count } of columns) {
    out.set(values.subarray(0, count), at);
    at += count;
  }
  return out;
}

function outerFaces(
  mesh: LumenMesh,
  forest: Forest,
  strips: Int32Array,
  sections: TubeSections,
  pointOf: Int32Array,
): Pick<LumenVolume, 'triangle' | 'patchOfTriangle' | 'quad' | 'patchOfQuad'> {
  const triangle = new GrowingRows(mesh.triangle.length);
  const patchOfTriangle = new GrowingRows(mesh.patch.length);
  const quad = new GrowingRows(1024);
  const patchOfQuad = new GrowingRows(256);
  for (let t = 0; t < mesh.patch.length; t++) {
    if (mesh.patch[t] !== 0) continue;
    for (let k = 0; k < 3; k++) triangle.push(pointOf[mesh.triangle[3 * t + k]!]!);
    patchOfTriangle.push(0);
  }
  const { disc } = sections;
  mesh.patches.forEach((patch, number) => {
    if (patch.row < 0) return;
    const root = forest.parent[patch.row]! < 0;
    // A root's only child follows it.
    const vessel = root ? patch.row + 1 : patch.row;
    const ring = root ? 0 : strips[vessel]!;
    const at = (corner: number): number => sectionPoint(sections, vessel, ring, corner);
    for (let l = 0; l < disc.layers; l++) {
      for (let j = 0; j < disc.around; j++) {
        const o = l * disc.around;
        const next = j + 1 === disc.around ? 0 : j + 1;
        const corners = [o + j, o + next, o + disc.around + next, o + disc.around + j].map(at);
        for (const v of root ? corners.toReversed() : corners) quad.push(v);
        patchOfQuad.push(number);
      }
    }
    for (let t = 0; t < disc.triangle.length; t += 3) {
      const corners = [...disc.triangle.subarray(t, t + 3)].map(at);
      for (const v of root ? corners.toReversed() : corners) triangle.push(v);
      patchOfTriangle.push(number);
    }
  });
  return {
    triangle: triangle.trimmed(),
    patchOfTriangle: patchOfTriangle.trimmed(),
    quad: quad.trimmed(),
    patchOfQuad: patchOfQuad.trimmed(),
  };
}

function listSections(forest: Forest, strips: Int32Array, sections: TubeSections): SectionList {
  const row = new GrowingRows(1024);
  const rim = new GrowingRows(1024);
  const inside = new GrowingRows(1024);
  const { around } = sections.disc;
  for (let vessel = 0; vessel < forest.count; vessel++) {
    if (forest.parent[vessel]! < 0) continue;
    for (let ring = 0; ring <= strips[vessel]!; ring++) {
      row.push(vessel);
      rim.push(sectionPoint(sections, vessel, ring, 0));
      inside.push(sectionPoint(sections, vessel, ring, around));
    }
  }
  return {
    count: row.count,
    row: row.trimmed(),
    rim: rim.trimmed(),
    inside: inside.trimmed(),
    disc: sections.disc,
  };
}
