import { inputError } from '../../core/errors.ts';
import { type NegativeNotes, readNegativeNotes } from './negative.ts';

/** What the checker reads of `mesh.json`; everything else in it is for others. */
export interface MeshNotes {
  /** m, one unit of length of the surface files. */
  readonly unit: number;
  /** Segments round a vessel that were asked for. */
  readonly around: number;
  /** Pa·s, or NaN where the file does not say. */
  readonly viscosity: number;
  /** kg/m³, or NaN. */
  readonly density: number;
  /** Names of a binary file's patches by number, or null. */
  readonly patches: readonly string[] | null;
  /** The word for `unit`. */
  readonly unitName: string;
  /** What the file says the mesh has, by key; null where it does not say. */
  readonly counts: Readonly<Record<string, unknown>> | null;
  /** As the file has them: `inside_point_m`, `inside_points_m`; undefined where it has none. */
  readonly insidePoint: unknown;
  readonly insidePoints: unknown;
  /** What is stated of a printable negative. */
  readonly negative: NegativeNotes;
  /** Names of the patches behind which something was cut off; none where nothing was, null where it does not say. */
  readonly cutPatches: readonly string[] | null;
  /** Lengths of the network whose pressures the tables give. */
  readonly lengths: 'axis' | 'effective';
  /** Pa lost to each cap in the networks of axis and of effective lengths; null where the file does not say. */
  readonly drops: readonly { readonly patch: string; readonly drop: readonly [number, number] }[] | null;
}

const UNIT: Readonly<Record<string, number>> = { m: 1, mm: 1e-3, um: 1e-6 };

/**
 * Reads `mesh.json`: keys `unit`, `around`, `viscosity_Pa_s`, `density_kg_m3`, `patches` (names), `counts`,
 * `inside_point_m`, `inside_points_m`, `cut_off`, `negative`, `extensions`, `network`, all optional.
 *
 * @param text null where there is no such file: metres, 24 round a vessel
 * @throws InputError where it is not JSON or a key is not what it should be
 */
export function readMeshNotes(file: string, text: string | null): MeshNotes {
  let value: unknown = {};
  if (text !== null) {
    try {
      value = JSON.parse(text);
    } catch (error) {
      throw inputError('bad-json', file, `got no JSON: ${(error as Error).message}`);
    }
  }
  if (typeof value !== 'object' || value === null) throw inputError('bad-json', file, 'got no object, expected one');
  const notes = value as Readonly<Record<string, unknown>>;
  const unit = notes.unit ?? 'm';
  if (typeof unit !== 'string' || UNIT[unit] === undefined) {
    throw inputError('bad-unit', file, `unit: got ${JSON.stringify(unit)}, expected m, mm or um`);
  }
  const number = (key: string, otherwise: number) => {
    const got = notes[key];
    if (got === undefined || got === null) return otherwise;
    if (typeof got !== 'number' || !(got > 0)) {
      throw inputError('bad-number', file, `${key}: got ${JSON.stringify(got)}, expected > 0`);
    }
    return got;
  };
  const patches = notes.patches;
  const named = Array.isArray(patches) && patches.every((patch) => typeof patch === 'string');
  return {
    unit: UNIT[unit]!,
    around: number('around', 24),
    viscosity: number('viscosity_Pa_s', Number.NaN),
    density: number('density_kg_m3', Number.NaN),
    patches: named ? patches : null,
    unitName: unit,
    counts: isObject(notes.counts) ? notes.counts : null,
    insidePoint: notes.inside_point_m,
    insidePoints: notes.inside_points_m,
    negative: readNegativeNotes(notes.negative, notes.extensions),
    cutPatches: cutPatches(notes.cut_off),
    ...networkNotes(file, notes.network),
  };
}

function networkNotes(file: string, told: unknown): Pick<MeshNotes, 'lengths' | 'drops'> {
  if (!isObject(told)) return { lengths: 'axis', drops: null };
  const lengths = told.lengths ?? 'axis';
  if (lengths !== 'axis' && lengths !== 'effective') {
    throw inputError('bad-word', file, `network.lengths: got ${JSON.stringify(lengths)}, expected axis or effective`);
  }
  if (!Array.isArray(told.drops)) return { lengths, drops: null };
  const drops = told.drops.filter(isObject).map((one) => ({
    patch: String(one.patch),
    drop: [Number(one.axis_Pa), Number(one.effective_Pa)] as const,
  }));
  return { lengths, drops };
}

function isObject(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function cutPatches(cutOff: unknown): readonly string[] | null {
  if (cutOff === null) return [];
  if (!isObject(cutOff) || !Array.isArray(cutOff.patches)) return null;
  return cutOff.patches.map(String);
}
