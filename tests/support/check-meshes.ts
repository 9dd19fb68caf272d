import type { LumenFiles } from '../../src/check/lumen/check-lumen.ts';

type Point = [number, number, number];

/** A triangle of a hand-made lumen: patch and three corners, m. */
export interface HandTriangle {
  patch: string;
  at: [Point, Point, Point];
}

/** A hand-made lumen that a test may spoil before it is written. */
export interface HandLumen {
  triangles: HandTriangle[];
  /** Order of the solids in the file. */
  patches: string[];
  boundary: Record<string, string | number>[];
  network: Record<string, string | number>[];
  notes: Record<string, unknown>;
}

const VISCOSITY = 0.0035;
const DENSITY = 1060;

/**
 * Straight tubes, one a tree, each with an inlet and an outlet cap; everything in the tables right.
 *
 * @param trees  how many tubes, side by side
 * @param around edges round a rim, even
 */
export function buildTubes(trees = 1, around = 24): HandLumen {
  const lumen: HandLumen = {
    triangles: [],
    patches: ['wall'],
    boundary: [],
    network: [],
    notes: { unit: 'm', around, viscosity_Pa_s: VISCOSITY, density_kg_m3: DENSITY },
  };
  for (let t = 0; t < trees; t++) addTube(lumen, t, around);
  return lumen;
}

function addTube(lumen: HandLumen, t: number, around: number): void {
  const radius = 4e-4 / (t + 1);
  const length = 8 * radius;
  const flow = 2e-9;
  const from: Point = [0.001 + 0.004 * t, 0.002, -0.003];
  // A tilted frame: axis u, and two directions square to it.
  const u: Point = [1 / 3, 2 / 3, 2 / 3];
  const v: Point = [2 / 3, 1 / 3, -2 / 3];
  const w: Point = [-2 / 3, 2 / 3, -1 / 3];
  const place = (along: number, angle: number, r: number): Point =>
    [0, 1, 2].map((k) => from[k]! + along * u[k]! + r * (Math.cos(angle) * v[k]! + Math.sin(angle) * w[k]!)) as Point;
  const step = (2 * Math.PI) / around;
  const rings = Math.round(length / (0.25 * radius));
  const add = (patch: string, a: Point, b: Point, c: Point) => lumen.triangles.push({ patch, at: [a, b, c] });
  for (let ring = 0; ring < rings; ring++) {
    const [x, y] = [(ring * length) / rings, ((ring + 1) * length) / rings];
    for (let k = 0; k < around; k++) {
      const [a, b] = [k * step, ((k + 1) % around) * step];
      add('wall', place(x, a, radius), place(x, b, radius), place(y, b, radius));
      add('wall', place(x, a, radius), place(y, b, radius), place(y, a, radius));
    }
  }
  const names = [`inlet_${t}`, `outlet_${10 * t + 3}`];
  for (const [end, name] of names.entries()) {
    const along = end * length;
    const cap = (a: Point, b: Point, c: Point) => (end === 0 ? add(name, a, c, b) : add(name, a, b, c));
    const half = around / 2;
    for (let k = 0; k < half; k++) {
      const at = (j: number) => place(along, (j % around) * step, radius);
      const inner = (j: number) => place(along, (2 * (j % half) + 1) * step, 0.5 * radius);
      cap(at(2 * k), at(2 * k + 1), inner(k));
      cap(at(2 * k + 1), at(2 * k + 2), inner(k));
      cap(at(2 * k + 2), inner(k + 1), inner(k));
      cap(inner(k), inner(k + 1), place(along, 0, 0));
    }
    const sign = end === 0 ? -1 : 1;
    const [cx, cy, cz] = place(along, 0, 0);
    const drop = (8 * VISCOSITY * length * flow) / (Math.PI * radius * radius * radius * radius);
    const velocity = flow / (Math.PI * radius * radius);
    lumen.patches.push(name);
    lumen.boundary.push({
      patch: name,
      type: end === 0 ? 'inlet' : 'outlet',
      radius_m: radius,
      cx,
      cy,
      cz,
      nx: sign * u[0],
      ny: sign * u[1],
      nz: sign * u[2],
      flow_m3_s: flow,
      pressure_Pa: 8000 - end * drop,
      mean_velocity_m_s: velocity,
      reynolds: (DENSITY * velocity * 2 * radius) / VISCOSITY,
      resistance_Pa_s_m3: end === 0 ? '' : 0,
      windkessel_r1: '',
      windkessel_r2: '',
      windkessel_c: '',
      tree: t,
      vessel: 10 * t + 3 * end,
    });
    // The network has a node half-way, so that there is one where flow can be conserved.
    const [x0, y0, z0] = place((end * length) / 2, 0, 0);
    const [x1, y1, z1] = place(((end + 1) * length) / 2, 0, 0);
    lumen.network.push({
      segment: 10 * t + 3 * end,
      from: 3 * t + end,
      to: 3 * t + end + 1,
      ...{ x0, y0, z0, x1, y1, z1 },
      r0_m: radius,
      r1_m: radius,
      length_m: length / 2,
      flow_m3_s: flow,
      p0_Pa: 8000 - (end * drop) / 2,
      p1_Pa: 8000 - ((end + 1) * drop) / 2,
    });
  }
}

/** The files of a hand-made lumen: STL with nine significant digits, tables with all digits. */
export function writeLumen(lumen: HandLumen): LumenFiles {
  const lines: string[] = [];
  for (const patch of lumen.patches) {
    lines.push(`solid ${patch}`);
    for (const { at } of lumen.triangles.filter((triangle) => triangle.patch === patch)) {
      lines.push('facet normal 0 0 0', 'outer loop');
      for (const corner of at) lines.push(`vertex ${corner.map((x) => x.toExponential(8)).join(' ')}`);
      lines.push('endloop', 'endfacet');
    }
    lines.push(`endsolid ${patch}`);
  }
  const table = (rows: Record<string, string | number>[]) =>
    [Object.keys(rows[0]!), ...rows.map((row) => Object.values(row))].map((cells) => `${cells.join(',')}\n`).join('');
  const encode = (text: string) => new TextEncoder().encode(text);
  return {
    surface: encode(`${lines.join('\n')}\n`),
    boundary: encode(table(lumen.boundary)),
    network: encode(table(lumen.network)),
    notes: encode(JSON.stringify(lumen.notes)),
  };
}
