/** Rounding bounds of the determinants below, over the sum of their absolute terms (Shewchuk 1997; from memory). */
const VOLUME_BOUND = 7.8e-16;
const AREA_BOUND = 3.4e-16;

/** Sign of the volume of four rows of a (3v) position column; exact. */
export function volumeSign(position: Float64Array, a: number, b: number, c: number, d: number): number {
  const dx = position[3 * d]!;
  const dy = position[3 * d + 1]!;
  const dz = position[3 * d + 2]!;
  const ax = position[3 * a]! - dx;
  const ay = position[3 * a + 1]! - dy;
  const az = position[3 * a + 2]! - dz;
  const bx = position[3 * b]! - dx;
  const by = position[3 * b + 1]! - dy;
  const bz = position[3 * b + 2]! - dz;
  const cx = position[3 * c]! - dx;
  const cy = position[3 * c + 1]! - dy;
  const cz = position[3 * c + 2]! - dz;
  const bycz = by * cz;
  const bzcy = bz * cy;
  const bzcx = bz * cx;
  const bxcz = bx * cz;
  const bxcy = bx * cy;
  const bycx = by * cx;
  const volume = ax * (bycz - bzcy) + ay * (bzcx - bxcz) + az * (bxcy - bycx);
  const size =
    Math.abs(ax) * (Math.abs(bycz) + Math.abs(bzcy)) +
    Math.abs(ay) * (Math.abs(bzcx) + Math.abs(bxcz)) +
    Math.abs(az) * (Math.abs(bxcy) + Math.abs(bycx));
  if (Math.abs(volume) > VOLUME_BOUND * size) return Math.sign(volume);
  return size === 0 ? 0 : exactVolumeSign(position, a, b, c, d);
}

/** Sign of the area of three rows seen along a coordinate axis; exact. */
export function areaSign(position: Float64Array, axis: number, a: number, b: number, c: number): number {
  const u = (axis + 1) % 3;
  const v = (axis + 2) % 3;
  const left = (position[3 * a + u]! - position[3 * c + u]!) * (position[3 * b + v]! - position[3 * c + v]!);
  const right = (position[3 * a + v]! - position[3 * c + v]!) * (position[3 * b + u]! - position[3 * c + u]!);
  const area = left - right;
  const size = Math.abs(left) + Math.abs(right);
  if (Math.abs(area) > AREA_BOUND * size) return Math.sign(area);
  if (size === 0) return 0;
  const at = exactIntegers([a, b, c].flatMap((row) => [position[3 * row + u]!, position[3 * row + v]!]));
  return signOf((at[0]! - at[4]!) * (at[3]! - at[5]!) - (at[1]! - at[5]!) * (at[2]! - at[4]!));
}

function exactVolumeSign(position: Float64Array, a: number, b: number, c: number, d: number): number {
  const at = exactIntegers([a, b, c, d].flatMap((row) => [...position.subarray(3 * row, 3 * row + 3)]));
  const from = (corner: number, k: number) => at[3 * corner + k]! - at[9 + k]!;
  return signOf(
    from(0, 0) * (from(1, 1) * from(2, 2) - from(1, 2) * from(2, 1)) +
      from(0, 1) * (from(1, 2) * from(2, 0) - from(1, 0) * from(2, 2)) +
      from(0, 2) * (from(1, 0) * from(2, 1) - from(1, 1) * from(2, 0)),
  );
}

function signOf(value: bigint): number {
  return value > 0n ? 1 : value < 0n ? -1 : 0;
}

/** Whole numbers in the same proportions as the given reals: every double is a whole number of some power of two. */
function exactIntegers(values: readonly number[]): bigint[] {
  const view = new DataView(new ArrayBuffer(8));
  const parts = values.map((value) => {
    view.setFloat64(0, value);
    const high = view.getUint32(0);
    const biased = (high >>> 20) & 0x7ff;
    const fraction = (BigInt(high & 0xfffff) << 32n) | BigInt(view.getUint32(4));
    const size = biased === 0 ? fraction : fraction | (1n << 52n);
    return { whole: value < 0 ? -size : size, power: Math.max(1, biased) };
  });
  let least = 2047;
  for (const part of parts) if (part.whole !== 0n && part.power < least) least = part.power;
  return parts.map((part) => (part.whole === 0n ? 0n : part.whole << BigInt(part.power - least)));
}
