import type { Scene } from './scene.ts';

export type Axis = 0 | 1 | 2;

/** A plane square to an axis; what lies beyond it is cut away. */
export interface Section {
  readonly on: boolean;
  readonly axis: Axis;
  /** m, along the axis. */
  readonly offset: number;
  /** Keeps the high side instead of the low one. */
  readonly flip: boolean;
}

/** Plane n·x ≤ d in scene units as [nx, ny, nz, d]; one that keeps everything where the section is off. */
export function planeOf(scene: Scene, section: Section): [number, number, number, number] {
  if (!section.on) return [0, 0, 0, 1];
  const sign = section.flip ? -1 : 1;
  const plane: [number, number, number, number] = [0, 0, 0, 0];
  plane[section.axis] = sign;
  plane[3] = sign * (section.offset - scene.centre[section.axis]!) * scene.scale;
  return plane;
}
