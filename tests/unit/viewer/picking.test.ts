import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { frameOf, homeCamera, placeInPicture, rayThrough } from '../../../viewer/camera.ts';
import { type PickOptions, pickVessel, type Ray, spanOfRoundCone } from '../../../viewer/picking.ts';
import { MARK, packScene } from '../../../viewer/scene.ts';
import { twoFacingTrees } from '../../support/viewer-tree.ts';

type Triple = [number, number, number];

const EVERYTHING: PickOptions = {
  thinnest: 0,
  lowestOrder: 1,
  plane: [0, 0, 0, 1],
  widen: 0,
  widenByDistance: 0,
  inFront: 0,
};

/** Slow twin: the round cone as `steps` + 1 balls along its axis, each met by the ray on its own. */
function spanOfBalls(o: Triple, d: Triple, a: Triple, b: Triple, ra: number, rb: number, steps: number) {
  let enter = Infinity;
  let leave = -Infinity;
  for (let i = 0; i <= steps; i++) {
    const s = i / steps;
    const r = ra + s * (rb - ra);
    const w = [0, 1, 2].map((k) => o[k]! - a[k]! - s * (b[k]! - a[k]!));
    const along = w[0]! * d[0] + w[1]! * d[1] + w[2]! * d[2];
    const inside = along * along - (w[0]! * w[0]! + w[1]! * w[1]! + w[2]! * w[2]!) + r * r;
    if (inside < 0) continue;
    enter = Math.min(enter, -along - Math.sqrt(inside));
    leave = Math.max(leave, -along + Math.sqrt(inside));
  }
  return { enter, leave };
}

function span(o: Triple, d: Triple, a: Triple, b: Triple, ra: number, rb: number) {
  const out = { enter: 0, leave: 0 };
  const met = spanOfRoundCone(
    o[0] - a[0],
    o[1] - a[1],
    o[2] - a[2],
    d[0],
    d[1],
    d[2],
    b[0] - a[0],
    b[1] - a[1],
    b[2] - a[2],
    ra,
    rb,
    out,
  );
  return { met, ...out };
}

describe('spanOfRoundCone', () => {
  it('meets a tube across, along and at its ends where arithmetic says', () => {
    const a: Triple = [0, 0, 0];
    const b: Triple = [4, 0, 0];
    // Across the middle of a tube of radius 0.5, from 3 away: 3 ∓ 0.5.
    expect(span([2, 0, 3], [0, 0, -1], a, b, 0.5, 0.5)).toEqual({ met: true, enter: 3 - 0.5, leave: 3 + 0.5 });
    // Along the axis: both end balls, from 1 + 0.5 before the start to 0.5 past the end.
    const along = span([-2, 0, 0], [1, 0, 0], a, b, 0.5, 0.5);
    expect(along.enter).toBeCloseTo(2 - 0.5, 12);
    expect(along.leave).toBeCloseTo(2 + 4 + 0.5, 12);
    // Just beside it.
    expect(span([2, 0.51, 3], [0, 0, -1], a, b, 0.5, 0.5).met).toBe(false);
    // A cone of radii 1 and 0.5 over length 4: the wall's cone has sine (1 − 0.5)/4; at the axis place x the wall over
    // it is (1 − x·sin)/cos high.
    const sine = 0.5 / 4;
    const high = (1 - 2 * sine) / Math.sqrt(1 - sine * sine);
    expect(span([2, 0, 5], [0, 0, -1], a, b, 1, 0.5).enter).toBeCloseTo(5 - high, 12);
  });

  it('takes one ball that holds the other as that ball', () => {
    const one = span([0, 0, 5], [0, 0, -1], [0, 0, 0], [0.1, 0, 0], 1, 0.3);
    expect(one.enter).toBeCloseTo(5 - 1, 12);
    const none = span([0, 0, 5], [0, 0, -1], [0, 0, 0], [0, 0, 0], 0.4, 0.4);
    expect(none.enter).toBeCloseTo(5 - 0.4, 12);
  });

  it('agrees with thousands of balls along the axis', () => {
    const random = seedrandom('round cones');
    const pick = (): Triple => [2 * random() - 1, 2 * random() - 1, 2 * random() - 1];
    let met = 0;
    for (let i = 0; i < 600; i++) {
      const a = pick();
      const b = pick();
      const ra = 0.02 + 0.3 * random();
      const rb = i % 3 === 0 ? ra : 0.02 + 0.3 * random();
      const o = pick().map((x) => 4 * x) as Triple;
      const aim = pick().map((x) => 0.6 * x);
      const length = Math.hypot(aim[0]! - o[0], aim[1]! - o[1], aim[2]! - o[2]);
      const d = aim.map((x, k) => (x - o[k]!) / length) as Triple;
      const twin = spanOfBalls(o, d, a, b, ra, rb, 4000);
      const got = span(o, d, a, b, ra, rb);
      // Balls only fill the cone as their number grows, so the twin may miss what is grazed.
      if (twin.enter <= twin.leave) {
        met++;
        expect(got.met).toBe(true);
        expect(Math.abs(got.enter - twin.enter)).toBeLessThan(2e-3);
        expect(Math.abs(got.leave - twin.leave)).toBeLessThan(2e-3);
      } else if (got.met) expect(got.leave - got.enter).toBeLessThan(0.05);
    }
    expect(met).toBeGreaterThan(100);
  });
});

describe('pickVessel', () => {
  const scene = packScene(twoFacingTrees());
  const { ends, marks, count } = scene;
  const triple = (at: number): Triple => [ends[at]!, ends[at + 1]!, ends[at + 2]!];

  /** Slow twin: every vessel by balls, no shortcut. */
  function nearestByBalls(ray: Ray): { vessel: number; distance: number } {
    let best = { vessel: -1, distance: Infinity };
    for (let v = 0; v < count; v++) {
      const at = 8 * v;
      const { enter } = spanOfBalls(
        ray.origin as Triple,
        ray.direction as Triple,
        triple(at),
        triple(at + 4),
        ends[at + 3]!,
        ends[at + 7]!,
        150,
      );
      if (enter < best.distance) best = { vessel: v, distance: enter };
    }
    return best;
  }

  it('finds what the slow twin finds, over the picture', () => {
    const camera = homeCamera(true);
    let met = 0;
    for (let i = 0; i < 8; i++) {
      for (let j = 0; j < 8; j++) {
        const ray = rayThrough(camera, 1.3, -0.5 + i / 8, -0.35 + (0.7 * j) / 8);
        const twin = nearestByBalls(ray);
        const got = pickVessel(ends, marks, count, ray, EVERYTHING);
        if (twin.vessel < 0) continue;
        met++;
        expect(got).not.toBeNull();
        expect(got!.distance).toBeCloseTo(twin.distance, 2);
        // Two vessels may share the ball at their common node; then either will do.
        if (got!.vessel !== twin.vessel) expect(Math.abs(got!.distance - twin.distance)).toBeLessThan(2e-3);
      }
    }
    expect(met).toBeGreaterThan(15);
  });

  it('finds the vessel whose middle is looked at, in both projections', () => {
    for (const perspective of [true, false]) {
      const camera = homeCamera(perspective);
      for (const vessel of [0, 1, 255, 256, 300]) {
        const at = 8 * vessel;
        const middle = triple(at).map((x, k) => 0.5 * (x + ends[at + 4 + k]!)) as Triple;
        const place = placeInPicture(camera, 1.3, middle);
        const ray = rayThrough(camera, 1.3, place.x, place.y);
        // Nothing else is in the way when all but this one are hidden by a zero order.
        const alone = new Uint8Array(marks.length);
        alone[2 * vessel + 1] = 1;
        expect(pickVessel(ends, alone, count, ray, EVERYTHING)?.vessel).toBe(vessel);
      }
    }
  });

  it('sees through hidden vessels, and past a section to the face of the cut', () => {
    const camera = homeCamera(true);
    const { forward, eye } = frameOf(camera);
    const middle = triple(0).map((x, k) => 0.5 * (x + ends[4 + k]!)) as Triple;
    const place = placeInPicture(camera, 1.3, middle);
    const ray = rayThrough(camera, 1.3, place.x, place.y);
    expect(pickVessel(ends, marks, count, ray, { ...EVERYTHING, thinnest: ends[7]! * 1.01 })).toBeNull();
    expect(pickVessel(ends, marks, count, ray, { ...EVERYTHING, lowestOrder: 9 })).toBeNull();
    // A plane square to the view through the trunk's middle, keeping what lies behind it: the ray meets the face there.
    const [nx, ny, nz] = forward.map((x) => -x) as Triple;
    const d = nx * middle[0] + ny * middle[1] + nz * middle[2];
    const cut = pickVessel(ends, marks, count, ray, { ...EVERYTHING, plane: [nx, ny, nz, d] })!;
    expect(cut.vessel).toBe(0);
    const eyeToMiddle = Math.hypot(...middle.map((x, k) => x - eye[k]!));
    expect(cut.distance).toBeCloseTo(eyeToMiddle, 6);
    // The other way round, the near half is kept and met at the wall, a radius nearer at least.
    const near = pickVessel(ends, marks, count, ray, { ...EVERYTHING, plane: [-nx, -ny, -nz, -d] })!;
    expect(near.distance).toBeLessThan(eyeToMiddle - 0.99 * ends[7]!);
  });

  it('widens thin vessels as they are drawn', () => {
    const camera = homeCamera(true);
    const vessel = 100;
    const at = 8 * vessel;
    const alone = new Uint8Array(marks.length);
    alone[2 * vessel + 1] = 1;
    const middle = triple(at).map((x, k) => 0.5 * (x + ends[at + 4 + k]!)) as Triple;
    const place = placeInPicture(camera, 1, middle);
    // A step to the side in the picture, square to the vessel: 0.03 of half its height.
    const start = placeInPicture(camera, 1, triple(at));
    const along = Math.hypot(start.x - place.x, start.y - place.y);
    const beside = rayThrough(
      camera,
      1,
      place.x + (0.03 * (start.y - place.y)) / along,
      place.y - (0.03 * (start.x - place.x)) / along,
    );
    expect(pickVessel(ends, alone, count, beside, EVERYTHING)).toBeNull();
    expect(pickVessel(ends, alone, count, beside, { ...EVERYTHING, widenByDistance: 0.02 })?.vessel).toBe(vessel);
    expect(pickVessel(ends, alone, count, beside, { ...EVERYTHING, widen: 0.08 })?.vessel).toBe(vessel);
  });

  it('meets marked vessels before all others where they are drawn in front', () => {
    const ends2 = new Float32Array([0, -1, 0, 0.2, 0, 1, 0, 0.2, 1, -1, 0, 0.2, 1, 1, 0, 0.2]);
    const ray: Ray = { origin: [-3, 0, 0], direction: [1, 0, 0] };
    const plain = new Uint8Array([0, 1, MARK.way, 1]);
    expect(pickVessel(ends2, plain, 2, ray, EVERYTHING)?.vessel).toBe(0);
    expect(pickVessel(ends2, plain, 2, ray, { ...EVERYTHING, inFront: MARK.way })?.vessel).toBe(1);
  });
});
