import { expect, test } from 'vitest';
import { parseSpec, specFromValue } from '../../../src/spec/parse.ts';
import { specToJson } from '../../../src/spec/write.ts';
import { soundSpec } from '../../support/bend-spec.ts';

test('SI keys only, every default filled in, points on one line', () => {
  const text = specToJson(specFromValue(soundSpec()), { version: '1.2.3' });
  expect(JSON.parse(text)).toEqual({
    format: 1,
    version: '1.2.3',
    name: 'sound',
    seed: 'sound-1',
    tissue: { shape: 'box', min_m: [0, 0, 0], max_m: [12 / 1000, 12 / 1000, 6 / 1000] },
    trees: [
      {
        name: 'supply',
        kind: 'supply',
        inlet: {
          position_m: [0, 6 / 1000, 3 / 1000],
          direction: [1, 0, 0],
          pressure_Pa: expect.closeTo(60 * 133.322387415, 9),
          flow_m3_s: expect.closeTo((1.2 * 1e-6) / 60, 20),
        },
        terminals: { count: 20, pressure_Pa: expect.closeTo(20 * 133.322387415, 9) },
      },
    ],
    blood: { viscosity: { law: 'constant', value_Pa_s: 3.5 / 1000 }, density_kg_m3: 1060 },
    sizing: { rule: 'pressure-matched', maintenance_W_m3: 625, junction_exponent: 3 },
    clearance: { gap_m: 20 / 1e6 },
    junctions: { min_angle_deg: 25 },
    refine: 'quick',
  });
  expect(text).toContain('"max_m": [0.012, 0.012, 0.006]');
  expect(text.endsWith('}\n')).toBe(true);
});

test('the text reads back as the same spec and writes the same text', () => {
  const spec = specFromValue({ ...soundSpec(), purpose: 'to be read back', refine: 12 });
  const text = specToJson(spec);
  expect(parseSpec(text)).toEqual(spec);
  expect(specToJson(parseSpec(text))).toBe(text);
});

test('every angle from 15 to 60 degrees comes back to the last bit', () => {
  for (let step = 0; step <= 450; step++) {
    const spec = specFromValue({ ...soundSpec(), junctions: { min_angle_deg: 15 + step / 10 } });
    expect(parseSpec(specToJson(spec)).junctions.minAngle).toBe(spec.junctions.minAngle);
  }
});

test('an angle set by hand comes back within a unit in the last place', () => {
  const spec = { ...specFromValue(soundSpec()), junctions: { minAngle: Math.PI / 7 } };
  const back = parseSpec(specToJson(spec)).junctions.minAngle;
  expect(Math.abs(back - Math.PI / 7)).toBeLessThanOrEqual(2 ** -53);
});

test('a stamp is optional', () => {
  const text = specToJson(specFromValue(soundSpec()));
  expect(JSON.parse(text).format).toBe(1);
  expect('version' in JSON.parse(text)).toBe(false);
});
