import { describe, expect, it } from 'vitest';
import {
  fitted,
  frameOf,
  homeCamera,
  OPENING,
  panned,
  placeInPicture,
  rayThrough,
  turned,
  zoomed,
} from '../../../viewer/camera.ts';
import { cameraAfterKey } from '../../../viewer/input.ts';

const dot = (a: readonly number[], b: readonly number[]) => a[0]! * b[0]! + a[1]! * b[1]! + a[2]! * b[2]!;

describe('the camera', () => {
  it('has a right-handed frame of unit vectors and looks at its target', () => {
    let camera = homeCamera(true);
    for (let i = 0; i < 12; i++) {
      camera = turned(panned(camera, 0.1, -0.2), 0.7, 0.2 * (i - 5));
      const { right, up, forward, eye } = frameOf(camera);
      for (const [a, b, wanted] of [
        [right, right, 1],
        [up, up, 1],
        [forward, forward, 1],
        [right, up, 0],
        [right, forward, 0],
        [up, forward, 0],
      ] as const) {
        expect(dot(a, b)).toBeCloseTo(wanted, 12);
      }
      // right × up points at the eye.
      expect(right[0] * up[1] - right[1] * up[0]).toBeCloseTo(-forward[2], 12);
      for (let k = 0; k < 3; k++) {
        expect(eye[k]! + camera.distance * forward[k]!).toBeCloseTo(camera.target[k]!, 12);
      }
      expect(placeInPicture(camera, 1.5, camera.target)).toEqual({ x: expect.closeTo(0), y: expect.closeTo(0) });
    }
  });

  it('sends a line of sight through the point it was sent through', () => {
    for (const perspective of [true, false]) {
      const camera = panned(turned(homeCamera(perspective), 0.3, 0.1), 0.05, 0.1);
      for (const point of [
        [0.3, -0.2, 0.5],
        [-0.7, 0.1, 0],
      ] as const) {
        const place = placeInPicture(camera, 1.7, point);
        const { origin, direction } = rayThrough(camera, 1.7, place.x, place.y);
        const w = point.map((x, k) => x - origin[k]!);
        const along = dot(w, direction);
        expect(along).toBeGreaterThan(0);
        expect(dot(w, w) - along * along).toBeCloseTo(0, 10);
      }
    }
  });

  it('moves the picture by the part of its height that was asked for', () => {
    const camera = homeCamera(false);
    const moved = panned(camera, 0.1, 0.2);
    // Heights run from −1 to 1, widths from −1 to 1 over an aspect of 2.
    expect(placeInPicture(moved, 2, camera.target).x).toBeCloseTo((2 * 0.1) / 2, 12);
    expect(placeInPicture(moved, 2, camera.target).y).toBeCloseTo(2 * 0.2, 12);
    expect(zoomed(camera, 0.5).distance).toBe(0.5 * camera.distance);
    expect(zoomed(camera, 0).distance).toBeGreaterThan(0);
  });

  it('fits points so that all are in sight and one comes near the edge', () => {
    const points = new Float32Array([1, 0, 0, 9, -1, 0.2, 0.4, 9, 0.3, -0.8, 0.1, 9, 0, 0.2, 0.9, 9]);
    for (const perspective of [true, false]) {
      for (const aspect of [0.6, 1, 2.2]) {
        const camera = fitted(homeCamera(perspective), aspect, [{ points, stride: 4 }]);
        let edge = 0;
        for (let i = 0; i < points.length; i += 4) {
          const place = placeInPicture(camera, aspect, [points[i]!, points[i + 1]!, points[i + 2]!]);
          edge = Math.max(edge, Math.abs(place.x), Math.abs(place.y));
        }
        expect(edge).toBeCloseTo(0.88, 6);
      }
    }
    expect(fitted(homeCamera(true), 1, [])).toEqual(homeCamera(true));
  });

  it('answers keys, and only its own', () => {
    const camera = homeCamera(true);
    expect(cameraAfterKey(camera, 'ArrowRight', false)!.azimuth).toBeGreaterThan(camera.azimuth);
    expect(cameraAfterKey(camera, 'ArrowUp', false)!.elevation).toBeGreaterThan(camera.elevation);
    expect(cameraAfterKey(camera, 'ArrowUp', true)!.target).not.toEqual(camera.target);
    expect(cameraAfterKey(camera, '+', false)!.distance).toBeLessThan(camera.distance);
    expect(cameraAfterKey(camera, '-', false)!.distance).toBeGreaterThan(camera.distance);
    // Looking along z from above, with x to the right.
    const above = frameOf(cameraAfterKey(camera, 'z', false)!);
    expect(above.forward[2]).toBeCloseTo(-1, 5);
    expect(above.right[0]).toBeCloseTo(1, 12);
    expect(cameraAfterKey(camera, 'q', false)).toBeNull();
    let steep = camera;
    for (let i = 0; i < 100; i++) steep = cameraAfterKey(steep, 'ArrowUp', false)!;
    expect(steep.elevation).toBeLessThan(Math.PI / 2);
    expect(OPENING).toBeCloseTo(2 * Math.tan(Math.PI / 12), 12);
  });
});
