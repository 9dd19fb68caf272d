import { decodeText } from '../../core/text.ts';
import { openAppended } from './appended-file.ts';

/** One kind of cells, corners as VTK numbers them but for wedges, whose two triangles change places. */
export interface CellKind {
  readonly name: string;
  readonly size: number;
  /** Corners of its faces, counter-clockwise seen from outside. */
  readonly faces: readonly (readonly number[])[];
  /** At each corner the three that edges lead to, right-handed. */
  readonly edges: readonly (readonly [number, number, number, number])[];
}

const KINDS: Readonly<Record<number, CellKind>> = {
  10: {
    name: 'tetrahedron',
    size: 4,
    faces: [
      [1, 2, 3],
      [0, 3, 2],
      [0, 1, 3],
      [0, 2, 1],
    ],
    edges: [
      [0, 1, 2, 3],
      [1, 2, 0, 3],
      [2, 0, 1, 3],
      [3, 2, 1, 0],
    ],
  },
  13: {
    name: 'wedge',
    size: 6,
    faces: [
      [0, 2, 1],
      [3, 4, 5],
      [0, 1, 4, 3],
      [1, 2, 5, 4],
      [2, 0, 3, 5],
    ],
    edges: [
      [0, 1, 2, 3],
      [1, 2, 0, 4],
      [2, 0, 1, 5],
      [3, 5, 4, 0],
      [4, 3, 5, 1],
      [5, 4, 3, 2],
    ],
  },
  14: {
    name: 'pyramid',
    size: 5,
    faces: [
      [0, 3, 2, 1],
      [0, 1, 4],
      [1, 2, 4],
      [2, 3, 4],
      [3, 0, 4],
    ],
    edges: [
      [0, 1, 3, 4],
      [1, 2, 0, 4],
      [2, 3, 1, 4],
      [3, 0, 2, 4],
    ],
  },
};

/** The cells and values of `lumen_volume.vtu`. */
export interface VolumeCells {
  readonly points: number;
  /** (3 points), in the file's unit. */
  readonly position: Float64Array;
  readonly cells: number;
  readonly kind: readonly CellKind[];
  /** (cells) place of each cell's first corner in `corner`. */
  readonly start: Int32Array;
  readonly corner: Int32Array;
  /** (cells) */
  readonly vessel: Int32Array;
  /** (3 points) m/s */
  readonly velocity: Float64Array;
  /** (points) Pa */
  readonly pressure: Float64Array;
  readonly unit: string | null;
}

/**
 * Reads a volume mesh.
 *
 * @throws InputError where the file is cut short or is something else
 */
export function readVolume(file: string, bytes: Uint8Array): VolumeCells {
  const { fail, block, needed } = openAppended(file, bytes, 'UnstructuredGrid');
  const position = new Float64Array(needed('Points', 'Points', 'Float64', 24));
  const corner = new Int32Array(needed('Cells', 'connectivity', 'Int32', 4));
  const ends = new Int32Array(needed('Cells', 'offsets', 'Int32', 4));
  const types = new Uint8Array(needed('Cells', 'types', 'UInt8', 1));
  const vessel = new Int32Array(needed('CellData', 'vessel', 'Int32', 4));
  const velocity = new Float64Array(needed('PointData', 'velocity_m_s', 'Float64', 24));
  const pressure = new Float64Array(needed('PointData', 'pressure_Pa', 'Float64', 8));
  const points = position.length / 3;
  const cells = types.length;
  for (const [name, got, wanted] of [
    ['offsets', ends.length, cells],
    ['vessel', vessel.length, cells],
    ['velocity_m_s', velocity.length / 3, points],
    ['pressure_Pa', pressure.length, points],
  ] as const) {
    if (got !== wanted) throw fail(`${name}: got ${got} entries, expected ${wanted}`);
  }
  for (const [name, values] of [
    ['Points', position],
    ['velocity_m_s', velocity],
    ['pressure_Pa', pressure],
  ] as const) {
    const odd = values.findIndex((x) => !Number.isFinite(x));
    if (odd >= 0) throw fail(`${name}: got ${values[odd]}, expected finite numbers`);
  }
  const kind: CellKind[] = [];
  const start = new Int32Array(cells);
  for (let c = 0, from = 0; c < cells; c++) {
    const one = KINDS[types[c]!];
    if (one === undefined) throw fail(`cell ${c}: got type ${types[c]}, expected one of ${Object.keys(KINDS)}`);
    if (ends[c] !== from + one.size) throw fail(`cell ${c}: got corners ${from} to ${ends[c]}, expected ${one.size}`);
    kind.push(one);
    start[c] = from;
    if (one.size === 6) corner.set([...corner.slice(from + 3, from + 6), ...corner.slice(from, from + 3)], from);
    from += one.size;
  }
  if (corner.length !== (cells === 0 ? 0 : ends[cells - 1])) throw fail('got more corners than the cells have');
  const wrong = corner.findIndex((v) => !(v >= 0 && v < points));
  if (wrong >= 0) throw fail(`connectivity: got point ${corner[wrong]}, expected below ${points}`);
  const unit = block('FieldData', 'length_unit', 'UInt8');
  return {
    points,
    position,
    cells,
    kind,
    start,
    corner,
    vessel,
    velocity,
    pressure,
    unit: unit === null ? null : decodeText(unit).replace(/\0.*$/, ''),
  };
}
