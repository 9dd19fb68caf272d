/**
 * The direction that leads behind some faces as squarely as can be: the largest least −cosine with their normals. It is
 * opposite to the centre of the smallest cap of the unit sphere round the normals, which two or three of them bound.
 *
 * @param normals (3 count) unit vectors
 * @param out     (3) gets the direction
 * @returns       the least −cosine; not above 0 where no direction leads behind all
 * Cost:          O(count⁴), for the few faces that meet in a corner
 */
export function mostInward(normals: Float64Array, count: number, out: Float64Array): number {
  let best = -Infinity;
  const attempt = (x: number, y: number, z: number): void => {
    const scale = Math.sqrt(x * x + y * y + z * z);
    if (!(scale > 1e-9)) return;
    let least = Infinity;
    for (let i = 0; i < count; i++) {
      const dot = (x * normals[3 * i]! + y * normals[3 * i + 1]! + z * normals[3 * i + 2]!) / scale;
      if (dot < least) least = dot;
      if (least <= best) return;
    }
    best = least;
    out[0] = -x / scale;
    out[1] = -y / scale;
    out[2] = -z / scale;
  };
  const at = (i: number, k: number): number => normals[3 * i + k]!;
  attempt(at(0, 0), at(0, 1), at(0, 2));
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < i; j++) {
      attempt(at(i, 0) + at(j, 0), at(i, 1) + at(j, 1), at(i, 2) + at(j, 2));
      const [ux, uy, uz] = [at(j, 0) - at(i, 0), at(j, 1) - at(i, 1), at(j, 2) - at(i, 2)];
      for (let k = 0; k < j; k++) {
        // At the same angle from all three: square to the plane through their tips, to either side.
        const [vx, vy, vz] = [at(k, 0) - at(i, 0), at(k, 1) - at(i, 1), at(k, 2) - at(i, 2)];
        const [x, y, z] = [uy * vz - uz * vy, uz * vx - ux * vz, ux * vy - uy * vx];
        attempt(x, y, z);
        attempt(-x, -y, -z);
      }
    }
  }
  return best;
}
