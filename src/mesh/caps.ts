import type { Children } from '../tree/children.ts';
import type { Forest, TreeKind } from '../tree/forest.ts';
import type { Disc } from './disc.ts';
import type { GrowingSurface } from './growing-surface.ts';
import type { LumenPatch } from './lumen.ts';
import type { TubeLayout } from './tube-layout.ts';

/**
 * Lists the patches of a forest's lumen: the wall, then a cap for each root and terminal in row order.
 *
 * @param numbers (n) what each row's vessel is called by
 */
export function listPatches(
  forest: Forest,
  children: Children,
  layout: TubeLayout,
  numbers: Int32Array,
  kinds: readonly TreeKind[] | undefined,
): LumenPatch[] {
  const patches: LumenPatch[] = [
    { name: 'wall', kind: 'wall', row: -1, tree: -1, vessel: -1, centre: [0, 0, 0], normal: [0, 0, 0], radius: 0 },
  ];
  const { position } = forest;
  for (let row = 0; row < forest.count; row++) {
    const root = forest.parent[row]! < 0;
    if (!root && children.start[row] !== children.start[row + 1]) continue;
    const vessel = root ? children.list[children.start[row]!]! : row;
    const sign = root ? -1 : 1;
    const tree = forest.tree[row]!;
    const number = numbers[vessel]!;
    const drain = kinds?.[tree] === 'drain';
    const name = root
      ? drain
        ? `outlet_tree_${tree}`
        : `inlet_${tree}`
      : drain
        ? `inlet_vessel_${number}`
        : `outlet_${number}`;
    patches.push({
      name,
      kind: root === drain ? 'outlet' : 'inlet',
      row,
      tree,
      vessel: number,
      centre: [position[3 * row]!, position[3 * row + 1]!, position[3 * row + 2]!],
      normal: [0, 1, 2].map((k) => sign * layout.axis[3 * vessel + k]!) as [number, number, number],
      radius: forest.radius[vessel]!,
    });
  }
  return patches;
}

/**
 * Adds the disc of a cap to a surface that has the rim.
 *
 * @param vessel row of the vessel that ends at the cap
 * @param root   whether the cap is at the vessel's root-side end
 * @param rim    first vertex of the rim
 * @param index  number of the patch
 */
export function addCap(
  out: GrowingSurface,
  layout: TubeLayout,
  disc: Disc,
  patch: LumenPatch,
  vessel: number,
  root: boolean,
  rim: number,
  index: number,
): void {
  const { around } = disc;
  const { centre } = patch;
  const [ex, ey, ez] = [layout.side[3 * vessel]!, layout.side[3 * vessel + 1]!, layout.side[3 * vessel + 2]!];
  const [ux, uy, uz] = [layout.axis[3 * vessel]!, layout.axis[3 * vessel + 1]!, layout.axis[3 * vessel + 2]!];
  const fx = uy * ez - uz * ey;
  const fy = uz * ex - ux * ez;
  const fz = ux * ey - uy * ex;
  // The disc turns with the ring's stagger.
  const ring = root ? 0 : layout.strips[vessel]!;
  const half = (ring & 1) === 1 ? Math.PI / around : 0;
  const a = layout.corner[vessel]!;
  const ca = a * Math.cos(half);
  const sa = a * Math.sin(half);
  const inside = out.vertices;
  for (let i = 0; i < disc.inner.length; i += 2) {
    const x = ca * disc.inner[i]! - sa * disc.inner[i + 1]!;
    const y = sa * disc.inner[i]! + ca * disc.inner[i + 1]!;
    out.addVertex(
      centre[0] + x * ex + y * fx,
      centre[1] + x * ey + y * fy,
      centre[2] + x * ez + y * fz,
      vessel,
      root ? 0 : 1,
    );
  }
  const at = (v: number): number => (v < around ? rim + v : inside + v - around);
  for (let i = 0; i < disc.triangle.length; i += 3) {
    const p = at(disc.triangle[i]!);
    const q = at(disc.triangle[i + 1]!);
    const r = at(disc.triangle[i + 2]!);
    if (root) out.addTriangle(p, r, q, index, patch.vessel);
    else out.addTriangle(p, q, r, index, patch.vessel);
  }
}
