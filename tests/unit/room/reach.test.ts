import { describe, expect, it } from 'vitest';
import { junctionReach } from '../../../src/check/junctions.ts';
import { reach } from '../../../src/mesh/reach.ts';
import { separationReach } from '../../../src/room/reach.ts';

describe('the ball in which two tubes part', () => {
  it('is where the circles on the sphere touch', () => {
    for (const degrees of [25, 40, 60, 75, 90, 120, 150]) {
      for (const slim of [0.1, 0.4, 0.9, 1]) {
        const angle = (degrees * Math.PI) / 180;
        const rho = separationReach(1, slim, Math.cos(angle));
        if (rho > 1 + 1e-12) expect(Math.asin(1 / rho) + Math.asin(slim / rho)).toBeCloseTo(angle, 10);
        // Even at the wider radius itself the circles are apart.
        else expect(Math.PI / 2 + Math.asin(slim)).toBeLessThanOrEqual(angle + 1e-10);
      }
    }
  });

  it('needs no more than the wider radius for a straight run', () => {
    expect(separationReach(2, 1.5, -1)).toBe(2);
    expect(separationReach(1, 1, -1)).toBe(1);
  });

  it('is the same for who grows, who meshes and who judges, each with its own code', () => {
    for (let degrees = 20; degrees <= 180; degrees += 4) {
      for (const slim of [0.05, 0.3, 0.7, 1]) {
        const angle = (degrees * Math.PI) / 180;
        const grown = separationReach(1, slim, Math.cos(angle));
        expect(reach(1, slim, angle)).toBeCloseTo(grown, 9);
        expect(junctionReach(1, slim, angle)).toBeCloseTo(grown, 9);
      }
    }
  });
});
