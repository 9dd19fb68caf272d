/** Reach of a fillet along each of the two walls it joins, in radii of the thinner tube. */
export const FILLET = 0.3;
/** Distance from the wall that counts as on it. */
const ON_WALL = 1e-11;

/**
 * The wall around one node: the union of its tubes, each a cylinder that starts in a half ball at the node, with the
 * creases between them filled.
 *
 * Lengths are in units of the node's widest tube, seen from the node. `evaluate` gives a field f that is negative
 * inside; along any ray from the node f rises and crosses 0 once, so the wall is a star about the node.
 *
 * Notation: dᵢ distance to the half line of tube i, aᵢ its radius, fᵢ = dᵢ − aᵢ, gᵢ = ∇dᵢ. Two tubes are joined by the
 * quadratic smooth minimum of width k = FILLET · min(a) · |gᵢ × gⱼ|: on a wall that turns by φ the fillet then reaches
 * k / sin φ, the same at every angle, and where two walls run into each other tangentially nothing is filled.
 */
export class JunctionShape {
  /** Number of tubes. */
  count = 0;
  /** (3k) unit axes, leaving the node. */
  axis = new Float64Array(3 * 8);
  /** (k) radii. */
  radius = new Float64Array(8);
  /** (k) edge length wanted on the wall of each tube. */
  edge = new Float64Array(8);
  /** How fast the edge length may grow with the distance from a thinner tube's wall and fillet. */
  grading = 0.4;

  /**
   * The point that the methods below look at or move. A field and not an argument: engines put numbers that go from
   * function to function on the heap, and these functions are called a hundred million times for a large tree.
   */
  x = 0;
  y = 0;
  z = 0;
  /** Tube that `evaluate` leaves out, or −1. */
  without = -1;
  /** Results of the last `evaluate`: field and gradient, unnormalised where tubes blend. */
  f = 0;
  gx = 0;
  gy = 0;
  gz = 0;

  /** Result of the last `nearest`. */
  along = 0;

  private own = new Float64Array(8);
  private grad = new Float64Array(3 * 8);

  /** Forgets all tubes and makes room for `count`. */
  reset(count: number): void {
    this.count = 0;
    if (count <= this.radius.length) return;
    this.axis = new Float64Array(3 * count);
    this.radius = new Float64Array(count);
    this.edge = new Float64Array(count);
    this.own = new Float64Array(count);
    this.grad = new Float64Array(3 * count);
  }

  addTube(x: number, y: number, z: number, radius: number, edge: number): void {
    const i = this.count++;
    this.axis[3 * i] = x;
    this.axis[3 * i + 1] = y;
    this.axis[3 * i + 2] = z;
    this.radius[i] = radius;
    this.edge[i] = edge;
  }

  lookAt(x: number, y: number, z: number): void {
    this.x = x;
    this.y = y;
    this.z = z;
  }

  /** Distance from the point to the half line of a tube. */
  distance(tube: number): number {
    const { x, y, z } = this;
    const ux = this.axis[3 * tube]!;
    const uy = this.axis[3 * tube + 1]!;
    const uz = this.axis[3 * tube + 2]!;
    const s = Math.max(0, x * ux + y * uy + z * uz);
    const px = x - s * ux;
    const py = y - s * uy;
    const pz = z - s * uz;
    return Math.sqrt(px * px + py * py + pz * pz);
  }

  /** Tube whose wall is nearest to the point; leaves in `along` how far along its axis the point is. */
  nearest(): number {
    const { axis, radius, count, x, y, z } = this;
    let near = 0;
    let least = Infinity;
    for (let i = 0; i < count; i++) {
      const ux = axis[3 * i]!;
      const uy = axis[3 * i + 1]!;
      const uz = axis[3 * i + 2]!;
      const dot = x * ux + y * uy + z * uz;
      const s = dot > 0 ? dot : 0;
      const px = x - s * ux;
      const py = y - s * uy;
      const pz = z - s * uz;
      const f = Math.sqrt(px * px + py * py + pz * pz) - radius[i]!;
      if (f < least) {
        least = f;
        near = i;
        this.along = s;
      }
    }
    return near;
  }

  /** Edge length wanted at the point. */
  edgeHere(): number {
    let best = Infinity;
    for (let i = 0; i < this.count; i++) {
      const away = this.distance(i) - (1 + FILLET) * this.radius[i]!;
      const edge = this.edge[i]! + (away > 0 ? this.grading * away : 0);
      if (edge < best) best = edge;
    }
    return best;
  }

  /** Sets f and its gradient at the point. */
  evaluate(): void {
    const { count, axis, own, grad, radius, x, y, z } = this;
    let near = this.without === 0 ? 1 : 0;
    for (let i = 0; i < count; i++) {
      if (i === this.without) {
        own[i] = Infinity;
        continue;
      }
      const ux = axis[3 * i]!;
      const uy = axis[3 * i + 1]!;
      const uz = axis[3 * i + 2]!;
      const along = x * ux + y * uy + z * uz;
      const s = along > 0 ? along : 0;
      const px = x - s * ux;
      const py = y - s * uy;
      const pz = z - s * uz;
      const d = Math.sqrt(px * px + py * py + pz * pz);
      const scale = d > 0 ? 1 / d : 0;
      own[i] = d - radius[i]!;
      grad[3 * i] = px * scale;
      grad[3 * i + 1] = py * scale;
      grad[3 * i + 2] = pz * scale;
      if (own[i]! < own[near]!) near = i;
    }
    let f = own[near]!;
    let gx = grad[3 * near]!;
    let gy = grad[3 * near + 1]!;
    let gz = grad[3 * near + 2]!;
    for (let i = 0; i < count; i++) {
      for (let j = i + 1; j < count; j++) {
        const c = own[i]! - own[j]!;
        const limit = FILLET * Math.min(radius[i]!, radius[j]!);
        if (c >= limit || c <= -limit) continue;
        const ax = grad[3 * i]!;
        const ay = grad[3 * i + 1]!;
        const az = grad[3 * i + 2]!;
        const bx = grad[3 * j]!;
        const by = grad[3 * j + 1]!;
        const bz = grad[3 * j + 2]!;
        const cx = ay * bz - az * by;
        const cy = az * bx - ax * bz;
        const cz = ax * by - ay * bx;
        const k = limit * Math.sqrt(cx * cx + cy * cy + cz * cz);
        if (c >= k || c <= -k) continue;
        const h = k - Math.abs(c);
        const blended = Math.min(own[i]!, own[j]!) - (h * h) / (4 * k);
        if (blended >= f) continue;
        f = blended;
        const w = 0.5 - c / (2 * k);
        gx = w * ax + (1 - w) * bx;
        gy = w * ay + (1 - w) * by;
        gz = w * az + (1 - w) * bz;
      }
    }
    this.f = f;
    this.gx = gx;
    this.gy = gy;
    this.gz = gz;
  }

  /** Where the axis of a tube leaves the tubes that are wider; 0 for the widest. */
  leaves(tube: number): number {
    this.lookAt(this.axis[3 * tube]!, this.axis[3 * tube + 1]!, this.axis[3 * tube + 2]!);
    let s = 0;
    for (let j = 0; j < this.count; j++) {
      if (j === tube || this.radius[j]! <= this.radius[tube]!) continue;
      s = Math.max(s, this.radius[j]! / Math.max(this.distance(j), 1e-9));
    }
    return s;
  }

  /**
   * Moves the point to the wall and leaves the gradient there in gx, gy, gz.
   *
   * Along the gradient first: on a thin tube far from the node a ray grazes the wall. Where walls meet at a sharp angle
   * the gradient leads to and fro, and the ray from the node, along which f rises steadily, ends it.
   */
  project(): void {
    for (let step = 0; step < 4; step++) {
      this.evaluate();
      const f = this.f;
      if (f < ON_WALL && f > -ON_WALL) return;
      const square = this.gx * this.gx + this.gy * this.gy + this.gz * this.gz;
      if (square < 0.3) break;
      const t = f / square;
      this.x -= t * this.gx;
      this.y -= t * this.gy;
      this.z -= t * this.gz;
    }
    this.shoot();
  }

  /** Moves the point to the wall along the ray from the node. */
  shoot(): void {
    const { x, y, z } = this;
    // Where the ray leaves the union without fillets; the wall is there or a little further out.
    let scale = 0;
    for (let i = 0; i < this.count; i++) {
      const s = this.radius[i]! / Math.max(this.distance(i), 1e-9);
      if (s > scale) scale = s;
    }
    for (let step = 0; step < 40; step++) {
      this.x = scale * x;
      this.y = scale * y;
      this.z = scale * z;
      this.evaluate();
      const f = this.f;
      if (f < ON_WALL && f > -ON_WALL) break;
      // f is concave along the ray where tubes blend and rises all the way: Newton comes from below.
      const slope = this.gx * x + this.gy * y + this.gz * z;
      if (!(slope > 0)) break;
      scale -= f / slope;
    }
  }

  /**
   * Least distance along a tube beyond which no other tube or fillet touches its wall.
   *
   * On the tube's wall the point nearest to another tube lies in the plane of the two axes, on the side of the other.
   * There either the other's cylinder counts, (s sin θ − aᵢ cos θ) − aⱼ ≥ gap, or its half ball, √(s² + aᵢ²) − aⱼ ≥ gap.
   * The gap is the fillet's width FILLET · min(a) · sin θ.
   *
   * @param graded also keep so far from thinner tubes that edges may have grown to three quarters of this tube's
   */
  clearAlong(tube: number, graded: boolean): number {
    const a = this.radius[tube]!;
    let clear = 0.3 * a;
    for (let j = 0; j < this.count; j++) {
      if (j === tube) continue;
      const b = this.radius[j]!;
      let cosine = 0;
      for (let m = 0; m < 3; m++) cosine += this.axis[3 * tube + m]! * this.axis[3 * j + m]!;
      const sine = Math.sqrt(Math.max(0, 1 - cosine * cosine));
      const growth = graded ? (0.75 * this.edge[tube]! - this.edge[j]!) / this.grading + FILLET * b : 0;
      const fillet = FILLET * Math.min(a, b);
      const sideGap = Math.max(fillet * sine, growth);
      const ballGap = Math.max(fillet, growth);
      const side = sine > 1e-9 ? (b + sideGap + a * cosine) / sine : cosine > 0 ? Infinity : 0;
      const ball = Math.sqrt(Math.max(0, (b + ballGap) * (b + ballGap) - a * a));
      const s = side * cosine + a * sine > 0 ? side : ball;
      if (s > clear) clear = s;
    }
    return this.count > 2 && clear < Infinity ? this.clearOfFillets(tube, clear) : clear;
  }

  /** The same place, moved out until the rim is also clear of what fills the creases between the other tubes. */
  private clearOfFillets(tube: number, from: number): number {
    const a = this.radius[tube]!;
    const u = this.axis.subarray(3 * tube, 3 * tube + 3);
    // Two directions square to the axis.
    const k = Math.abs(u[0]!) < 0.6 ? 0 : 1;
    const e = [0, 1, 2].map((m) => (m === k ? 1 : 0) - u[k]! * u[m]!);
    const scale = a / Math.sqrt(e[0]! * e[0]! + e[1]! * e[1]! + e[2]! * e[2]!);
    for (let m = 0; m < 3; m++) e[m]! *= scale;
    const f = [u[1]! * e[2]! - u[2]! * e[1]!, u[2]! * e[0]! - u[0]! * e[2]!, u[0]! * e[1]! - u[1]! * e[0]!];
    this.without = tube;
    let s = from;
    for (let step = 0; step < 40; step++) {
      let least = Infinity;
      for (let j = 0; j < 12; j++) {
        const c = Math.cos((j * Math.PI) / 6);
        const d = Math.sin((j * Math.PI) / 6);
        this.lookAt(
          s * u[0]! + c * e[0]! + d * f[0]!,
          s * u[1]! + c * e[1]! + d * f[1]!,
          s * u[2]! + c * e[2]! + d * f[2]!,
        );
        this.evaluate();
        if (this.f < least) least = this.f;
      }
      const short = 0.5 * FILLET * a - least;
      if (short <= 1e-9) break;
      // The field grows no faster than the distance: never too far.
      s += Math.max(short, 0.02 * a);
    }
    this.without = -1;
    return s;
  }
}
