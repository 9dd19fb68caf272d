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

/**
 * The view that a result opens with: from the front, a little above, all of it in sight.
 *
 * @param reach radius in scene units of what is to be seen round the origin
 */
export function homeCamera(perspective: boolean, reach = 1): Camera {
  return { target: [0, 0, 0], azimuth: -Math.PI / 3, elevation: Math.PI / 9, distance: 3.6 * reach, perspective };
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
