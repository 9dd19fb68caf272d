/*
 * The point with the least weighted sum of distances to three points.
 *
 * Notation: A, B, C points; wa, wb, wc weights; S twice the triangle's area; T four times the area of the triangle whose
 * sides are the weights; da = (B − A)·(C − A) and so on.
 *
 * Erect on each side a triangle similar to the weight triangle; the three joining lines meet in the optimum, whose
 * barycentric coordinates are 1/(cot A + cot φa) : …, with φa the weight triangle's angle opposite wa. With
 * cot A = da/S and cot φa = (wb² + wc² − wa²)/T that needs two square roots and no angle, and the same
 * denominator tells when the optimum falls on a corner: A + φa ≥ π  ⟺  cot A + cot φa ≤ 0, which is the classical test
 * |wb·u(AB) + wc·u(AC)| ≤ wa without any distance.
 */

/**
 * Point x that minimises wa·|x − A| + wb·|x − B| + wc·|x − C|, in closed form.
 *
 * @param ax  … cz: coordinates of the three points, one length unit; they may coincide or lie on a line
 * @param wa  weights ≥ 0, any unit, finite
 * @param out (≥ 3) receives x, y, z; on a collapse exactly the corner's coordinates
 * @returns   −1 where the optimum lies strictly between the points; otherwise the corner (0, 1, 2) it has collapsed to
 * Source: Fermat–Torricelli–Weber problem; corner test and lines as in E. N. Gilbert (1967), Bell Syst Tech J 46:2209;
 *         from memory, re-derived above.
 * Cost:   O(1), no iteration, allocates nothing. A coordinate that is not a number gives no number.
 */
export function fermatPoint(
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  cx: number,
  cy: number,
  cz: number,
  wa: number,
  wb: number,
  wc: number,
  out: Float64Array,
): number {
  // Weights that make no triangle: the heaviest point wins wherever the others are.
  const ta = wb - wa + wc;
  const tb = wc - wb + wa;
  const tc = wa - wc + wb;
  let corner = ta <= 0 ? 0 : tb <= 0 ? 1 : tc <= 0 ? 2 : -1;
  if (corner < 0) {
    const abx = bx - ax;
    const aby = by - ay;
    const abz = bz - az;
    const acx = cx - ax;
    const acy = cy - ay;
    const acz = cz - az;
    const bcx = cx - bx;
    const bcy = cy - by;
    const bcz = cz - bz;
    const da = abx * acx + aby * acy + abz * acz;
    const db = -(abx * bcx + aby * bcy + abz * bcz);
    const dc = acx * bcx + acy * bcy + acz * bcz;
    // The cross product of the two shorter sides loses least in a thin triangle: they meet where the dot product is least.
    let nx: number;
    let ny: number;
    let nz: number;
    if (da <= db && da <= dc) {
      nx = aby * acz - abz * acy;
      ny = abz * acx - abx * acz;
      nz = abx * acy - aby * acx;
    } else if (db <= dc) {
      nx = aby * bcz - abz * bcy;
      ny = abz * bcx - abx * bcz;
      nz = abx * bcy - aby * bcx;
    } else {
      nx = acy * bcz - acz * bcy;
      ny = acz * bcx - acx * bcz;
      nz = acx * bcy - acy * bcx;
    }
    const s = Math.sqrt(nx * nx + ny * ny + nz * nz);
    const t = Math.sqrt((wa + wb + wc) * ta * tb * tc);
    const ea = da * t + (wb * wb + wc * wc - wa * wa) * s;
    const eb = db * t + (wc * wc + wa * wa - wb * wb) * s;
    const ec = dc * t + (wa * wa + wb * wb - wc * wc) * s;
    if (ea <= 0) corner = 0;
    else if (eb <= 0) corner = 1;
    else if (ec <= 0) corner = 2;
    else {
      // Ratios instead of products, so that neither very small weights nor very small triangles underflow.
      const lb = ea / eb;
      const lc = ea / ec;
      const share = 1 / (1 + lb + lc);
      out[0] = ax + (lb * abx + lc * acx) * share;
      out[1] = ay + (lb * aby + lc * acy) * share;
      out[2] = az + (lb * abz + lc * acz) * share;
      return -1;
    }
  }
  out[0] = corner === 0 ? ax : corner === 1 ? bx : cx;
  out[1] = corner === 0 ? ay : corner === 1 ? by : cy;
  out[2] = corner === 0 ? az : corner === 1 ? bz : cz;
  return corner;
}

/**
 * Weighted sum of distances from a point to three points.
 *
 * @returns weight unit × length unit
 * Cost: O(1), allocates nothing.
 */
export function fermatCost(
  x: number,
  y: number,
  z: number,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  cx: number,
  cy: number,
  cz: number,
  wa: number,
  wb: number,
  wc: number,
): number {
  const ux = ax - x;
  const uy = ay - y;
  const uz = az - z;
  const vx = bx - x;
  const vy = by - y;
  const vz = bz - z;
  const qx = cx - x;
  const qy = cy - y;
  const qz = cz - z;
  return (
    wa * Math.sqrt(ux * ux + uy * uy + uz * uz) +
    wb * Math.sqrt(vx * vx + vy * vy + vz * vz) +
    wc * Math.sqrt(qx * qx + qy * qy + qz * qz)
  );
}

/**
 * Least weighted sum of distances to three points whose optimum is known to lie between them.
 *
 * @param a,b,c sides opposite the points with weights wa, wb, wc
 * @returns     weight unit × length unit; meaningless where the optimum is a corner
 * Source: F² = ½ Σ a²(wb² + wc² − wa²) + 8·area·(area of the weight triangle); from memory, re-derived.
 */
export function fermatInteriorCost(a: number, b: number, c: number, wa: number, wb: number, wc: number): number {
  const area = Math.sqrt(Math.max(0, (a + b + c) * (b - a + c) * (c - b + a) * (a - c + b))) / 4;
  const weightArea = Math.sqrt(Math.max(0, (wa + wb + wc) * (wb - wa + wc) * (wc - wb + wa) * (wa - wc + wb))) / 4;
  const half =
    0.5 *
    (a * a * (wb * wb + wc * wc - wa * wa) +
      b * b * (wc * wc + wa * wa - wb * wb) +
      c * c * (wa * wa + wb * wb - wc * wc));
  return Math.sqrt(half + 8 * area * weightArea);
}
