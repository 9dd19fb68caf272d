/**
 * Slow and obvious judges of a triangle surface; they share nothing with the code that builds meshes.
 */

export interface Surface {
  /** (3v) m */
  readonly position: ArrayLike<number>;
  /** (3f) */
  readonly triangle: ArrayLike<number>;
}

export interface Topology {
  readonly vertices: number;
  readonly edges: number;
  readonly triangles: number;
  /** Edges that do not have exactly two triangles. */
  readonly openEdges: number;
  /** Edges that both triangles run through the same way. */
  readonly misoriented: number;
  /** Vertices whose triangles do not form one closed fan. */
  readonly pinched: number;
  readonly components: number;
  /** V − E + F over all components. */
  readonly euler: number;
}

/** Counts what makes a surface closed, two-manifold, oriented and of some genus. */
export function judgeTopology(surface: Surface): Topology {
  const { triangle } = surface;
  const edges = new Map<string, [number, number]>();
  const used = new Set<number>();
  const around = new Map<number, number[][]>();
  const parent = new Map<number, number>();
  const find = (v: number): number => {
    let root = v;
    while (parent.get(root) !== root) root = parent.get(root)!;
    while (parent.get(v) !== root) {
      const next = parent.get(v)!;
      parent.set(v, root);
      v = next;
    }
    return root;
  };
  for (let t = 0; t < triangle.length; t += 3) {
    const corners = [triangle[t]!, triangle[t + 1]!, triangle[t + 2]!];
    for (let k = 0; k < 3; k++) {
      const a = corners[k]!;
      const b = corners[(k + 1) % 3]!;
      used.add(a);
      if (!parent.has(a)) parent.set(a, a);
      if (!parent.has(b)) parent.set(b, b);
      parent.set(find(a), find(b));
      const key = a < b ? `${a},${b}` : `${b},${a}`;
      const seen = edges.get(key) ?? [0, 0];
      seen[a < b ? 0 : 1]++;
      edges.set(key, seen);
      const fan = around.get(a) ?? [];
      fan.push([b, corners[(k + 2) % 3]!]);
      around.set(a, fan);
    }
  }
  let openEdges = 0;
  let misoriented = 0;
  for (const [up, down] of edges.values()) {
    if (up + down !== 2) openEdges++;
    else if (up !== 1) misoriented++;
  }
  let pinched = 0;
  for (const fan of around.values()) {
    const next = new Map(fan.map(([b, c]) => [b!, c!]));
    let steps = 0;
    let at = fan[0]![0]!;
    do {
      at = next.get(at) ?? -1;
      steps++;
    } while (at >= 0 && at !== fan[0]![0] && steps <= fan.length);
    if (at !== fan[0]![0] || steps !== fan.length) pinched++;
  }
  const roots = new Set([...used].map(find));
  const faces = triangle.length / 3;
  return {
    vertices: used.size,
    edges: edges.size,
    triangles: faces,
    openEdges,
    misoriented,
    pinched,
    components: roots.size,
    euler: used.size - edges.size + faces,
  };
}

/** Smallest angle of any triangle, degrees. */
export function judgeAngle(surface: Surface): number {
  let worst = 180;
  for (let t = 0; t < surface.triangle.length / 3; t++) {
    const [a, b, c] = corners(surface, t);
    worst = Math.min(worst, angleAt(a, b, c), angleAt(b, c, a), angleAt(c, a, b));
  }
  return worst;
}

/** Signed volume, m³; positive where normals point out. */
export function judgeVolume(surface: Surface): number {
  let sum = 0;
  const o = point(surface, surface.triangle[0]!);
  for (let t = 0; t < surface.triangle.length / 3; t++) {
    const [a, b, c] = corners(surface, t);
    sum += dot(minus(a, o), cross(minus(b, o), minus(c, o))) / 6;
  }
  return sum;
}

/**
 * Pairs of triangles that cross, touch, or fold back on each other: all pairs whose boxes share a cell of a grid are
 * tried, edge against triangle.
 */
export function judgeCrossings(surface: Surface): [number, number][] {
  const count = surface.triangle.length / 3;
  let mean = 0;
  for (let t = 0; t < count; t++) {
    const [a, b] = corners(surface, t);
    mean += Math.sqrt(dot(minus(a, b), minus(a, b)));
  }
  const cell = (2 * mean) / count;
  const cells = new Map<string, number[]>();
  for (let t = 0; t < count; t++) {
    const [a, b, c] = corners(surface, t);
    const low = a.map((x, k) => Math.floor(Math.min(x, b[k]!, c[k]!) / cell));
    const high = a.map((x, k) => Math.floor(Math.max(x, b[k]!, c[k]!) / cell));
    for (let x = low[0]!; x <= high[0]!; x++) {
      for (let y = low[1]!; y <= high[1]!; y++) {
        for (let z = low[2]!; z <= high[2]!; z++) {
          const key = `${x},${y},${z}`;
          const list = cells.get(key);
          if (list === undefined) cells.set(key, [t]);
          else list.push(t);
        }
      }
    }
  }
  const found = new Map<string, [number, number]>();
  for (const list of cells.values()) {
    for (let i = 0; i < list.length; i++) {
      for (let j = i + 1; j < list.length; j++) {
        const s = list[i]!;
        const t = list[j]!;
        if (boxesApart(surface, s, t)) continue;
        if (trianglesMeet(surface, s, t)) found.set(`${s},${t}`, [s, t]);
      }
    }
  }
  return [...found.values()];
}

function boxesApart(surface: Surface, s: number, t: number): boolean {
  const a = corners(surface, s);
  const b = corners(surface, t);
  for (let k = 0; k < 3; k++) {
    if (Math.max(a[0][k]!, a[1][k]!, a[2][k]!) < Math.min(b[0][k]!, b[1][k]!, b[2][k]!)) return true;
    if (Math.max(b[0][k]!, b[1][k]!, b[2][k]!) < Math.min(a[0][k]!, a[1][k]!, a[2][k]!)) return true;
  }
  return false;
}

/** Whether two triangles have more in common than the corners they share. */
export function trianglesMeet(surface: Surface, s: number, t: number): boolean {
  const one = [0, 1, 2].map((k) => surface.triangle[3 * s + k]!);
  const two = [0, 1, 2].map((k) => surface.triangle[3 * t + k]!);
  const shared = one.filter((v) => two.includes(v));
  const a = corners(surface, s);
  const b = corners(surface, t);
  if (shared.length === 3) return true;
  if (shared.length === 2) {
    // Two triangles on an edge overlap only where they fold flat on each other.
    const na = cross(minus(a[1], a[0]), minus(a[2], a[0]));
    const nb = cross(minus(b[1], b[0]), minus(b[2], b[0]));
    const cosine = dot(na, nb) / Math.sqrt(dot(na, na) * dot(nb, nb));
    return cosine < -Math.cos((1 * Math.PI) / 180);
  }
  for (let k = 0; k < 3; k++) {
    const p = one[k]!;
    const q = one[(k + 1) % 3]!;
    if (shared.includes(p) || shared.includes(q)) continue;
    if (segmentMeets(point(surface, p), point(surface, q), b)) return true;
  }
  for (let k = 0; k < 3; k++) {
    const p = two[k]!;
    const q = two[(k + 1) % 3]!;
    if (shared.includes(p) || shared.includes(q)) continue;
    if (segmentMeets(point(surface, p), point(surface, q), a)) return true;
  }
  return false;
}

type Vector = readonly [number, number, number];

function segmentMeets(p: Vector, q: Vector, [a, b, c]: readonly [Vector, Vector, Vector]): boolean {
  const n = cross(minus(b, a), minus(c, a));
  const dp = dot(n, minus(p, a));
  const dq = dot(n, minus(q, a));
  const size = Math.sqrt(dot(n, n) * dot(minus(q, p), minus(q, p)));
  // In one plane (caps are flat) an edge meets a triangle only if it crosses one of its sides or lies inside.
  if (Math.abs(dp) < 1e-9 * size && Math.abs(dq) < 1e-9 * size) return meetsInPlane(p, q, [a, b, c], n);
  if ((dp > 0 && dq > 0) || (dp < 0 && dq < 0)) return false;
  const d = minus(q, p);
  const u = dot(cross(minus(a, p), minus(b, p)), d);
  const v = dot(cross(minus(b, p), minus(c, p)), d);
  const w = dot(cross(minus(c, p), minus(a, p)), d);
  return (u >= 0 && v >= 0 && w >= 0) || (u <= 0 && v <= 0 && w <= 0);
}

function meetsInPlane(p: Vector, q: Vector, corners: readonly [Vector, Vector, Vector], n: Vector): boolean {
  const side = (a: Vector, b: Vector, c: Vector): number => dot(n, cross(minus(b, a), minus(c, a))) / dot(n, n);
  const slack = 1e-9;
  for (let k = 0; k < 3; k++) {
    const a = corners[k]!;
    const b = corners[(k + 1) % 3]!;
    const one = side(a, b, p);
    const two = side(a, b, q);
    const three = side(p, q, a);
    const four = side(p, q, b);
    const apart = (x: number, y: number): boolean => (x > slack && y < -slack) || (x < -slack && y > slack);
    if (apart(one, two) && apart(three, four)) return true;
  }
  const inside = (x: Vector): boolean => [0, 1, 2].every((k) => side(corners[k]!, corners[(k + 1) % 3]!, x) > slack);
  return inside(p) || inside(q);
}

function point(surface: Surface, v: number): Vector {
  return [surface.position[3 * v]!, surface.position[3 * v + 1]!, surface.position[3 * v + 2]!];
}

function corners(surface: Surface, t: number): [Vector, Vector, Vector] {
  const { triangle } = surface;
  return [point(surface, triangle[3 * t]!), point(surface, triangle[3 * t + 1]!), point(surface, triangle[3 * t + 2]!)];
}

function angleAt(a: Vector, b: Vector, c: Vector): number {
  const u = minus(b, a);
  const v = minus(c, a);
  const n = cross(u, v);
  return (Math.atan2(Math.sqrt(dot(n, n)), dot(u, v)) * 180) / Math.PI;
}

function minus(a: Vector, b: Vector): Vector {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function cross(a: Vector, b: Vector): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}
