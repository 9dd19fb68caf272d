/** Points of line pieces (two each) that outline a tissue, in m, and the parts that could not be outlined. */
export interface Outline {
  readonly points: number[];
  readonly left: string[];
  /** The tissue is made of several shapes. */
  combined: boolean;
}

const METRES: Record<string, number> = { m: 1, mm: 1e-3, um: 1e-6 };

type Part = Record<string, unknown>;

/**
 * Leaves out line pieces that end farther from a box than a tenth of its diagonal. Shapes that are combined reach far
 * past the tissue they make, such as the half space that cuts a wall.
 */
export function piecesNear(points: readonly number[], low: readonly number[], high: readonly number[]): number[] {
  const margin = 0.1 * Math.hypot(...low.map((x, k) => high[k]! - x));
  const near: number[] = [];
  for (let i = 0; i < points.length; i += 6) {
    const piece = points.slice(i, i + 6);
    if (piece.every((x, k) => x >= low[k % 3]! - margin && x <= high[k % 3]! + margin)) near.push(...piece);
  }
  return near;
}

/**
 * Outlines the tissue of a resolved spec: edges of boxes, circles of balls, ellipsoids and cylinders, of each part where
 * shapes are combined, and of parts that vessels keep out of. A tissue given by a file has no outline here.
 *
 * @param provenance the spec as JSON text; lengths carry their unit in the key (`min_mm`), or are in m
 */
export function outlineTissue(provenance: string | null): Outline {
  const outline: Outline = { points: [], left: [], combined: false };
  if (provenance === null) return outline;
  try {
    const spec = JSON.parse(provenance) as { tissue?: unknown };
    addShape(outline, spec.tissue);
    const { forbidden } = (spec.tissue ?? {}) as Part;
    if (Array.isArray(forbidden)) for (const part of forbidden) addShape(outline, part);
  } catch {
    outline.left.push('unreadable spec');
  }
  return outline;
}

function addShape(outline: Outline, shape: unknown): void {
  if (typeof shape !== 'object' || shape === null) return;
  const part = shape as Part;
  const before = outline.points.length;
  switch (part.shape) {
    case 'box':
      addBox(outline.points, triple(part, 'min'), triple(part, 'max'));
      break;
    case 'sphere': {
      const radius = lengths(part, 'radius')?.[0];
      addEllipsoid(outline.points, triple(part, 'center'), radius === undefined ? null : [radius, radius, radius]);
      break;
    }
    case 'ellipsoid':
      addEllipsoid(outline.points, triple(part, 'center'), triple(part, 'radii'));
      break;
    case 'cylinder':
      addCylinder(outline.points, triple(part, 'from'), triple(part, 'to'), lengths(part, 'radius')?.[0]);
      break;
    case 'union':
    case 'intersection':
      outline.combined = true;
      for (const inner of (part.parts as unknown[] | undefined) ?? []) addShape(outline, inner);
      return;
    case 'difference':
      outline.combined = true;
      addShape(outline, part.of);
      for (const inner of (part.minus as unknown[] | undefined) ?? []) addShape(outline, inner);
      return;
  }
  if (outline.points.length === before) outline.left.push(String(part.shape));
}

/** Numbers under a key with any length suffix, in m. */
function lengths(part: Part, name: string): number[] | null {
  for (const [key, value] of Object.entries(part)) {
    const suffix = key === name ? 'm' : key.startsWith(`${name}_`) ? key.slice(name.length + 1) : '';
    const metres = METRES[suffix];
    if (metres === undefined) continue;
    const list = Array.isArray(value) ? value : [value];
    if (list.every((x) => typeof x === 'number' && Number.isFinite(x))) return list.map((x: number) => x * metres);
  }
  return null;
}

type Point = readonly [number, number, number];

function triple(part: Part, name: string): Point | null {
  const list = lengths(part, name);
  return list?.length === 3 ? (list as unknown as Point) : null;
}

function addBox(points: number[], low: Point | null, high: Point | null): void {
  if (low === null || high === null) return;
  const corner = (bits: number) => [0, 1, 2].map((k) => ((bits >> k) & 1 ? high[k]! : low[k]!));
  for (let bits = 0; bits < 8; bits++) {
    for (let k = 0; k < 3; k++) if (!((bits >> k) & 1)) points.push(...corner(bits), ...corner(bits | (1 << k)));
  }
}

/** A closed curve of straight pieces. */
function addLoop(points: number[], at: (angle: number) => Point): void {
  const pieces = 72;
  for (let i = 0; i < pieces; i++) {
    points.push(...at((2 * Math.PI * i) / pieces), ...at((2 * Math.PI * (i + 1)) / pieces));
  }
}

function addEllipsoid(points: number[], centre: Point | null, radii: Point | null): void {
  if (centre === null || radii === null) return;
  const place = (x: number, y: number, z: number): Point => [
    centre[0] + radii[0] * x,
    centre[1] + radii[1] * y,
    centre[2] + radii[2] * z,
  ];
  for (const z of [-0.6, 0, 0.6]) {
    const r = Math.sqrt(1 - z * z);
    addLoop(points, (t) => place(r * Math.cos(t), r * Math.sin(t), z));
  }
  addLoop(points, (t) => place(Math.cos(t), 0, Math.sin(t)));
  addLoop(points, (t) => place(0, Math.cos(t), Math.sin(t)));
}

function addCylinder(points: number[], from: Point | null, to: Point | null, radius: number | undefined): void {
  if (from === null || to === null || radius === undefined) return;
  const axis = [to[0] - from[0], to[1] - from[1], to[2] - from[2]];
  const length = Math.hypot(axis[0]!, axis[1]!, axis[2]!);
  if (!(length > 0)) return;
  const [ax, ay, az] = axis.map((x) => x / length) as [number, number, number];
  // Any vector well off the axis, made square to it.
  const [hx, hy, hz] = Math.abs(az) < 0.9 ? [0, 0, 1] : [1, 0, 0];
  const ux = ay * hz! - az * hy!;
  const uy = az * hx! - ax * hz!;
  const uz = ax * hy! - ay * hx!;
  const size = Math.hypot(ux, uy, uz);
  const u: Point = [ux / size, uy / size, uz / size];
  const v: Point = [ay * u[2] - az * u[1], az * u[0] - ax * u[2], ax * u[1] - ay * u[0]];
  const onRim = (end: Point, t: number): Point => {
    const c = radius * Math.cos(t);
    const s = radius * Math.sin(t);
    return [end[0] + c * u[0] + s * v[0], end[1] + c * u[1] + s * v[1], end[2] + c * u[2] + s * v[2]];
  };
  addLoop(points, (t) => onRim(from, t));
  addLoop(points, (t) => onRim(to, t));
  for (let i = 0; i < 4; i++) points.push(...onRim(from, (i * Math.PI) / 2), ...onRim(to, (i * Math.PI) / 2));
}
