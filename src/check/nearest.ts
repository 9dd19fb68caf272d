/** Points sorted so that the nearest to a place is found in about log n steps. */
export interface NearestTree {
  /** Row of the point nearest to a place; any of them where several are as near. */
  nearest(x: number, y: number, z: number): number;
}

/** Points that are looked through one by one. */
const LEAF = 8;

/**
 * A balanced tree of halves, each cut across its longest extent.
 *
 * @param points (3n) m, n ≥ 1
 * Source: k-d tree, J. L. Bentley (1975), Commun ACM 18:509; from memory.
 * Cost:   O(n log n) to build, about 1 µs a question at 10⁶ points.
 */
export function buildNearestTree(points: Float64Array): NearestTree {
  const n = points.length / 3;
  const row = Int32Array.from({ length: n }, (_, i) => i);
  const axis = new Uint8Array(n);
  split(0, n);
  const sorted = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) for (let k = 0; k < 3; k++) sorted[3 * i + k] = points[3 * row[i]! + k]!;

  function split(low: number, high: number): void {
    if (high - low <= LEAF) return;
    let widest = 0;
    let extent = -1;
    for (let k = 0; k < 3; k++) {
      let least = Number.POSITIVE_INFINITY;
      let most = Number.NEGATIVE_INFINITY;
      for (let i = low; i < high; i++) {
        const x = points[3 * row[i]! + k]!;
        if (x < least) least = x;
        if (x > most) most = x;
      }
      if (most - least > extent) {
        extent = most - least;
        widest = k;
      }
    }
    const middle = (low + high) >> 1;
    select(low, high - 1, middle, widest);
    axis[middle] = widest;
    split(low, middle);
    split(middle + 1, high);
  }

  /** Puts the row that belongs at `at` there, lesser ones before it, greater ones after. */
  function select(first: number, last: number, at: number, k: number): void {
    let [low, high] = [first, last];
    while (low < high) {
      const pivot = points[3 * row[(low + high) >> 1]! + k]!;
      let [i, j] = [low, high];
      while (i <= j) {
        while (points[3 * row[i]! + k]! < pivot) i++;
        while (points[3 * row[j]! + k]! > pivot) j--;
        if (i > j) break;
        const kept = row[i]!;
        row[i++] = row[j]!;
        row[j--] = kept;
      }
      if (at <= j) high = j;
      else if (at >= i) low = i;
      else return;
    }
  }

  const place = new Float64Array(3);
  let best = Number.POSITIVE_INFINITY;
  let found = 0;

  function look(i: number): void {
    const dx = sorted[3 * i]! - place[0]!;
    const dy = sorted[3 * i + 1]! - place[1]!;
    const dz = sorted[3 * i + 2]! - place[2]!;
    const square = dx * dx + dy * dy + dz * dz;
    if (square >= best) return;
    best = square;
    found = i;
  }

  function search(low: number, high: number): void {
    if (high - low <= LEAF) {
      for (let i = low; i < high; i++) look(i);
      return;
    }
    const middle = (low + high) >> 1;
    const k = axis[middle]!;
    const off = place[k]! - sorted[3 * middle + k]!;
    if (off < 0) search(low, middle);
    else search(middle + 1, high);
    if (off * off >= best) return;
    look(middle);
    if (off < 0) search(middle + 1, high);
    else search(low, middle);
  }

  return {
    nearest(x, y, z) {
      place[0] = x;
      place[1] = y;
      place[2] = z;
      // The last answer is often near: it bounds the search from the start.
      best = Number.POSITIVE_INFINITY;
      look(found);
      search(0, n);
      return row[found]!;
    },
  };
}
