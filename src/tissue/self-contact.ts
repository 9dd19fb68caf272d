import type { TriangleSurface } from '../core/surface.ts';
import { apartMeet, cornerMeet, edgeMeet } from './triangle-contact.ts';
import { buildTriangleTree } from './triangle-tree.ts';

/** Two triangles of one surface that touch or cross away from the corners they share. */
export interface Contact {
  readonly first: number;
  readonly second: number;
}

/**
 * Looks for triangles that cross, touch or lie folded on each other.
 *
 * @param surface corner rows in range, finite, no triangle without area
 * @param most    stop after so many
 * @returns       pairs in order of their first triangle
 * Cost: O(f log f) where triangles are about as small as they are far apart; 10⁵ triangles in about half a second.
 */
export function selfContacts(surface: TriangleSurface, most: number): Contact[] {
  const { position, triangle } = surface;
  const { box, link, size, order } = buildTriangleTree(surface);
  const out: Contact[] = [];
  const stack = new Int32Array(128);
  for (let t = 0; t < triangle.length / 3; t++) {
    const a = 3 * triangle[3 * t]!;
    const b = 3 * triangle[3 * t + 1]!;
    const c = 3 * triangle[3 * t + 2]!;
    const x0 = Math.min(position[a]!, position[b]!, position[c]!);
    const x1 = Math.max(position[a]!, position[b]!, position[c]!);
    const y0 = Math.min(position[a + 1]!, position[b + 1]!, position[c + 1]!);
    const y1 = Math.max(position[a + 1]!, position[b + 1]!, position[c + 1]!);
    const z0 = Math.min(position[a + 2]!, position[b + 2]!, position[c + 2]!);
    const z1 = Math.max(position[a + 2]!, position[b + 2]!, position[c + 2]!);
    let top = 0;
    stack[top++] = 0;
    while (top > 0) {
      const node = stack[--top]!;
      const at = 6 * node;
      if (box[at]! > x1 || box[at + 3]! < x0) continue;
      if (box[at + 1]! > y1 || box[at + 4]! < y0) continue;
      if (box[at + 2]! > z1 || box[at + 5]! < z0) continue;
      if (size[node] === 0) {
        stack[top++] = link[node]!;
        stack[top++] = node + 1;
        continue;
      }
      for (let i = link[node]!; i < link[node]! + size[node]!; i++) {
        const other = order[i]!;
        if (other <= t || !trianglesMeet(position, a, b, c, triangle, other)) continue;
        out.push({ first: t, second: other });
        if (out.length >= most) return out;
      }
    }
  }
  return out;
}

/** Sorts a pair by how many corners it shares. */
function trianglesMeet(p: Float64Array, a: number, b: number, c: number, triangle: Int32Array, other: number): boolean {
  const d = 3 * triangle[3 * other]!;
  const e = 3 * triangle[3 * other + 1]!;
  const f = 3 * triangle[3 * other + 2]!;
  const hasA = a === d || a === e || a === f;
  const hasB = b === d || b === e || b === f;
  const hasC = c === d || c === e || c === f;
  const shared = (hasA ? 1 : 0) + (hasB ? 1 : 0) + (hasC ? 1 : 0);
  if (shared === 0) return apartMeet(p, a, b, c, d, e, f);
  if (shared === 3) return true;
  if (shared === 1) {
    const s = hasA ? a : hasB ? b : c;
    const a1 = hasA ? b : hasB ? c : a;
    const a2 = hasA ? c : hasB ? a : b;
    const d1 = s === d ? e : s === e ? f : d;
    const d2 = s === d ? f : s === e ? d : e;
    return cornerMeet(p, s, a1, a2, d1, d2);
  }
  const s = hasA ? a : b;
  const t = hasC ? c : b;
  const apex = !hasA ? a : !hasB ? b : c;
  const far = d !== s && d !== t ? d : e !== s && e !== t ? e : f;
  return edgeMeet(p, s, t, apex, far);
}
