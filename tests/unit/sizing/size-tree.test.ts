import { describe, expect, it } from 'vitest';
import { MMHG } from '../../../src/core/units.ts';
import { inletRadiusForMeanDrop, sizeByFlow } from '../../../src/sizing/flow-law.ts';
import { sizePressureMatched } from '../../../src/sizing/pressure-matched.ts';
import type { SizedRows } from '../../../src/sizing/sized-rows.ts';

const MU = 3.6e-3;
/** 500 mL/min. */
const Q = 500e-6 / 60;

/** Root, first vessel of 30 mm, two terminals at 20 and 40 mm from the junction, equal flows. */
function fork(): SizedRows {
  return {
    order: [0, 1, 2, 3],
    parent: [-1, 0, 1, 1],
    position: [0, 0, 0, 0.03, 0, 0, 0.05, 0, 0, 0.03, 0.04, 0],
    flow: [Q, Q, Q / 2, Q / 2],
  };
}

function dropTo(rows: SizedRows, radius: Float64Array, row: number): number {
  let drop = 0;
  for (let at = row; rows.parent[at]! >= 0; at = rows.parent[at]!) {
    const a = rows.parent[at]!;
    const length = Math.hypot(
      rows.position[3 * at]! - rows.position[3 * a]!,
      rows.position[3 * at + 1]! - rows.position[3 * a + 1]!,
      rows.position[3 * at + 2]! - rows.position[3 * a + 2]!,
    );
    drop += (8 * MU * length * rows.flow[at]!) / (Math.PI * radius[at]! ** 4);
  }
  return drop;
}

describe('pressure-matched sizing', () => {
  // Source: constrained constructive optimisation, Schreiner & Buxbaum (1993): formulas from memory, verified
  // numerically; worked values computed to 40 digits with another program; tolerance 1e-8 as printed.
  const cases = [
    { gamma: 3, radii: [0.9907464235, 0.7131060233, 0.8480307567], volume: 214.8346873 },
    { gamma: 2.55, radii: [1.013219412, 0.7012942833, 0.8339841514], volume: 215.0604373 },
  ];
  for (const { gamma, radii, volume } of cases) {
    it(`two equal terminals, γ = ${gamma}: the worked radii, volume, and both drops of 40 mmHg`, () => {
      const rows = fork();
      const out = new Float64Array(4);
      const first = sizePressureMatched(rows, 40 * MMHG, gamma, MU, out);
      expect(out[1]! / first).toBeCloseTo(1, 12);
      radii.forEach((r, k) => {
        expect(Math.abs((out[k + 1]! * 1e3) / r - 1)).toBeLessThan(1e-8);
      });
      const cubic = [0.03, 0.02, 0.04].reduce((sum, length, k) => sum + Math.PI * out[k + 1]! ** 2 * length, 0);
      expect(Math.abs((cubic * 1e9) / volume - 1)).toBeLessThan(1e-8);
      for (const row of [2, 3]) expect(Math.abs(dropTo(rows, out, row) / (40 * MMHG) - 1)).toBeLessThan(1e-12);
      expect(Math.abs(out[1]! ** gamma / (out[2]! ** gamma + out[3]! ** gamma) - 1)).toBeLessThan(1e-12);
    });
  }

  // Source: the same, single segment of 50 mm: r = (8 η l Q / (π Δp))^(1/4).
  for (const [drop, r] of [
    [40, 0.9199560397],
    [28, 1.005755845],
  ] as const) {
    it(`one segment, ${drop} mmHg`, () => {
      const rows = { order: [0, 1], parent: [-1, 0], position: [0, 0, 0, 0.05, 0, 0], flow: [Q, Q] };
      const out = new Float64Array(2);
      sizePressureMatched(rows, drop * MMHG, 3, MU, out);
      expect(Math.abs((out[1]! * 1e3) / r - 1)).toBeLessThan(1e-8);
    });
  }

  it('carries a bend as one tube', () => {
    const straight = { order: [0, 1], parent: [-1, 0], position: [0, 0, 0, 0.05, 0, 0], flow: [Q, Q] };
    const bent = {
      order: [0, 1, 2],
      parent: [-1, 0, 1],
      position: [0, 0, 0, 0.03, 0, 0, 0.03, 0.02, 0],
      flow: [Q, Q, Q],
    };
    const a = new Float64Array(2);
    const b = new Float64Array(3);
    sizePressureMatched(straight, 5000, 2.7, MU, a);
    sizePressureMatched(bent, 5000, 2.7, MU, b);
    expect(b[1]).toBeCloseTo(a[1]!, 15);
    expect(b[2]).toBeCloseTo(a[1]!, 15);
  });
});

describe('sizing by flow', () => {
  it('gives the flow-weighted mean pressure that was asked', () => {
    const rows = { ...fork(), flow: [Q, Q, 0.3 * Q, 0.7 * Q] };
    const out = new Float64Array(4);
    const inlet = inletRadiusForMeanDrop(rows, 40 * MMHG, 2.4, MU);
    sizeByFlow(rows, inlet, 2.4, out);
    const mean = 0.3 * dropTo(rows, out, 2) + 0.7 * dropTo(rows, out, 3);
    expect(Math.abs(mean / (40 * MMHG) - 1)).toBeLessThan(1e-12);
    expect(Math.abs(out[1]! ** 2.4 / (out[2]! ** 2.4 + out[3]! ** 2.4) - 1)).toBeLessThan(1e-12);
  });
});
