import type { LumenPiece } from './stream-lumen.ts';

/** What can be told of a surface while its triangles pass by. */
export class RunningFigures {
  triangles = 0;
  /** rad */
  smallestAngle = Math.PI;
  /** m */
  longestEdge = 0;
  /** m³, signed: positive with normals out. */
  volume = 0;
  /** m² */
  area = 0;
  /** Where the signed volumes are taken from: the first corner, which keeps the numbers small. */
  private readonly origin: [number, number, number] = [0, 0, 0];

  see({ triangles, position, triangle }: LumenPiece): void {
    const { origin } = this;
    if (this.triangles === 0 && triangles > 0) for (let k = 0; k < 3; k++) origin[k] = position[3 * triangle[0]! + k]!;
    let longest = this.longestEdge * this.longestEdge;
    for (let t = 0; t < triangles; t++) {
      const a = 3 * triangle[3 * t]!;
      const b = 3 * triangle[3 * t + 1]!;
      const c = 3 * triangle[3 * t + 2]!;
      const ax = position[a]! - origin[0];
      const ay = position[a + 1]! - origin[1];
      const az = position[a + 2]! - origin[2];
      const ux = position[b]! - position[a]!;
      const uy = position[b + 1]! - position[a + 1]!;
      const uz = position[b + 2]! - position[a + 2]!;
      const vx = position[c]! - position[a]!;
      const vy = position[c + 1]! - position[a + 1]!;
      const vz = position[c + 2]! - position[a + 2]!;
      const nx = uy * vz - uz * vy;
      const ny = uz * vx - ux * vz;
      const nz = ux * vy - uy * vx;
      const twice = Math.sqrt(nx * nx + ny * ny + nz * nz);
      this.volume += (nx * ax + ny * ay + nz * az) / 6;
      this.area += twice / 2;
      const uu = ux * ux + uy * uy + uz * uz;
      const vv = vx * vx + vy * vy + vz * vz;
      const uv = ux * vx + uy * vy + uz * vz;
      const first = Math.atan2(twice, uv);
      const second = Math.atan2(twice, uu - uv);
      this.smallestAngle = Math.min(this.smallestAngle, first, second, Math.PI - first - second);
      longest = Math.max(longest, uu, vv, uu + vv - 2 * uv);
    }
    this.longestEdge = Math.sqrt(longest);
    this.triangles += triangles;
  }
}
