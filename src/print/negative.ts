import type { ManifoldToplevel } from 'manifold-3d';
import type { TriangleSurface } from '../core/surface.ts';
import type { LumenMesh } from '../mesh/lumen.ts';
import type { Shape } from '../spec/types.ts';
import { meshSolid, PER_METRE, shapeSolid } from './shape-solid.ts';

/** A block of tissue with the lumen taken out of it: what a printer is given for channels in a gel. */
export interface Negative {
  /** One closed surface, m. */
  readonly surface: TriangleSurface;
  /** m³ of the block, and of the channels in it. */
  readonly block: number;
  readonly channels: number;
  /** What is wrong with it, a sentence each. */
  readonly problems: readonly string[];
}

let opened: Promise<ManifoldToplevel> | null = null;

/** The library of solids, which is WebAssembly and must be compiled first. */
function openLibrary(): Promise<ManifoldToplevel> {
  opened ??= import('manifold-3d').then(async ({ default: load }) => {
    const library = await load();
    library.setup();
    return library;
  });
  return opened;
}

/**
 * Takes the lumen out of the tissue's block. Channels end blind at terminals and are open where a tree's root sticks out
 * of the block, so roots are to be drawn out through its surface first.
 *
 * @param lumen    with roots that stick out of the block
 * @param shape    of the tissue
 * @param surfaces what was read of each surface file the shape names
 * @throws InputError where tissue or lumen bounds no solid
 * Cost: about 2 µs a triangle of the lumen. Corners are rounded to single precision in mm.
 */
export async function makeNegative(
  lumen: Pick<LumenMesh, 'position' | 'triangle'>,
  shape: Shape,
  surfaces: ReadonlyMap<string, TriangleSurface>,
): Promise<Negative> {
  const library = await openLibrary();
  const tissue = shapeSolid(library, shape, surfaces);
  const channels = meshSolid(library, lumen, PER_METRE, 'lumen');
  const solid = tissue.subtract(channels);
  const mesh = solid.getMesh();
  const { numProp, vertProperties, triVerts } = mesh;
  const position = new Float64Array(3 * (vertProperties.length / numProp));
  for (let v = 0; 3 * v < position.length; v++)
    for (let k = 0; k < 3; k++) position[3 * v + k] = vertProperties[v * numProp + k]! / PER_METRE;
  const surface = { position, triangle: Int32Array.from(triVerts) };
  const cubic = PER_METRE * PER_METRE * PER_METRE;
  const block = tissue.volume() / cubic;
  const shells = countShells(surface);
  const problems: string[] = [];
  if (shells > 1) {
    problems.push(
      `the negative has ${shells} surfaces, wanted 1: a channel that does not reach the surface of the block, or a part of it that was cut off`,
    );
  }
  const result = { surface, block, channels: block - solid.volume() / cubic, problems };
  for (const one of [tissue, channels, solid]) one.delete();
  return result;
}

/** Closed surfaces that a mesh consists of. */
function countShells({ position, triangle }: TriangleSurface): number {
  const up = Int32Array.from({ length: position.length / 3 }, (_, v) => v);
  const find = (v: number): number => {
    let at = v;
    while (up[at] !== at) {
      up[at] = up[up[at]!]!;
      at = up[at]!;
    }
    return at;
  };
  for (let t = 0; t < triangle.length; t += 3) {
    const a = find(triangle[t]!);
    up[find(triangle[t + 1]!)] = a;
    up[find(triangle[t + 2]!)] = a;
  }
  const used = new Set<number>();
  for (const v of triangle) used.add(find(v));
  return used.size;
}
