type Vector = readonly [number, number, number];

/** A camera that turns about a point with z up. Scene units and radians. */
export interface Camera {
  readonly target: Vector;
  /** Round z, from x. */
  readonly azimuth: number;
  /** Above the xy plane, within ±π/2. */
  readonly elevation: number;
  /** From the target to the eye. */
  readonly distance: number;
  readonly perspective: boolean;
}

/** Height of the view over its distance: tan of half the opening, twice. */
export const OPENING = 2 * Math.tan(Math.PI / 12);
const STEEPEST = Math.PI / 2 - 1e-3;
const NEAREST = 0.004;
const FARTHEST = 20;

/** The direction that a result opens with: from the front, a little above. */
export function homeCamera(perspective: boolean): Camera {
  return { target: [0, 0, 0], azimuth: -Math.PI / 3, elevation: Math.PI / 9, distance: 3.6, perspective };
}

/** Part of the picture's width and height that a fitted view fills. */
const FILL = 0.88;

/**
 * The same direction, placed so that all points are in sight and fill the picture.
 *
 * @param lists each (3 × points, stride apart) x, y, z in scene units; the middle of their box is looked at
 */
export function fitted(
  camera: Camera,
  aspect: number,
  lists: readonly { readonly points: ArrayLike<number>; readonly stride: number }[],
): Camera {
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (const { points, stride } of lists) {
    for (let i = 0; i + 2 < points.length; i += stride) {
      for (let k = 0; k < 3; k++) {
        low[k] = Math.min(low[k]!, points[i + k]!);
        high[k] = Math.max(high[k]!, points[i + k]!);
      }
    }
  }
  if (!(low[0]! <= high[0]!)) return camera;
  const target = low.map((x, k) => 0.5 * (x + high[k]!)) as [number, number, number];
  const { right, up, forward } = frameOf(camera);
  const tall = 0.5 * OPENING * FILL;
  const wide = tall * aspect;
  let distance = NEAREST;
  for (const { points, stride } of lists) {
    for (let i = 0; i + 2 < points.length; i += stride) {
      const w: Vector = [points[i]! - target[0], points[i + 1]! - target[1], points[i + 2]! - target[2]];
      const needed = Math.max(Math.abs(dot(w, right)) / wide, Math.abs(dot(w, up)) / tall);
      distance = Math.max(distance, camera.perspective ? needed - dot(w, forward) : needed);
    }
  }
  return { ...camera, target, distance: Math.min(FARTHEST, distance) };
}

/** Unit vectors to the right, up and into the picture, and the eye. */
export interface Frame {
  readonly right: Vector;
  readonly up: Vector;
  readonly forward: Vector;
  readonly eye: Vector;
}

export function frameOf(camera: Camera): Frame {
  const ca = Math.cos(camera.azimuth);
  const sa = Math.sin(camera.azimuth);
  const ce = Math.cos(camera.elevation);
  const se = Math.sin(camera.elevation);
  const forward: Vector = [-ca * ce, -sa * ce, -se];
  return {
    right: [-sa, ca, 0],
    up: [-ca * se, -sa * se, ce],
    forward,
    eye: shifted(camera.target, forward, -camera.distance),
  };
}

export function turned(camera: Camera, byAzimuth: number, byElevation: number): Camera {
  const elevation = Math.min(STEEPEST, Math.max(-STEEPEST, camera.elevation + byElevation));
  return { ...camera, azimuth: camera.azimuth + byAzimuth, elevation };
}

/** Nearer for a factor below 1. */
export function zoomed(camera: Camera, factor: number): Camera {
  return { ...camera, distance: Math.min(FARTHEST, Math.max(NEAREST, camera.distance * factor)) };
}

/** Moves the picture by parts of its height, to the right and up. */
export function panned(camera: Camera, right: number, up: number): Camera {
  const frame = frameOf(camera);
  const height = OPENING * camera.distance;
  const target = shifted(shifted(camera.target, frame.right, -right * height), frame.up, -up * height);
  return { ...camera, target };
}

/** Line of sight through a place in the picture: x and y in −1 … 1, right and up. */
export function rayThrough(
  camera: Camera,
  aspect: number,
  x: number,
  y: number,
): { origin: Vector; direction: Vector } {
  const { right, up, forward, eye } = frameOf(camera);
  const half = 0.5 * OPENING;
  if (!camera.perspective) {
    const size = half * camera.distance;
    const start = shifted(shifted(eye, right, x * aspect * size), up, y * size);
    // A parallel view has no eye: begin outside the scene, however near the camera is.
    return { origin: shifted(start, forward, -FARTHEST), direction: forward };
  }
  const d = shifted(shifted(forward, right, x * aspect * half), up, y * half);
  const length = Math.hypot(d[0], d[1], d[2]);
  return { origin: eye, direction: [d[0] / length, d[1] / length, d[2] / length] };
}

/** Place in the picture of a point: x and y in −1 … 1, right and up. */
export function placeInPicture(camera: Camera, aspect: number, point: Vector): { x: number; y: number } {
  const { right, up, forward, eye } = frameOf(camera);
  const w: Vector = [point[0] - eye[0], point[1] - eye[1], point[2] - eye[2]];
  const half = 0.5 * OPENING * (camera.perspective ? dot(w, forward) : camera.distance);
  return { x: dot(w, right) / (half * aspect), y: dot(w, up) / half };
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function shifted(from: Vector, along: Vector, by: number): Vector {
  return [from[0] + by * along[0], from[1] + by * along[1], from[2] + by * along[2]];
}
