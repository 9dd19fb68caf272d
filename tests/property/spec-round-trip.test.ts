import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { InputError } from '../../src/core/errors.ts';
import { fromSi, type Quantity, type Unit } from '../../src/core/units.ts';
import { parseSpec, specFromValue } from '../../src/spec/parse.ts';
import { unitsOf } from '../../src/spec/quantity.ts';
import { specToJson } from '../../src/spec/write.ts';
import { type Bendable, soundSpec } from '../support/bend-spec.ts';

// The limit also ends shrinking, which can go on for minutes on values as deep as these.
const SEED = { seed: 20_240_611, interruptAfterTimeLimit: 20_000, markInterruptAsFailure: true };

const inside = (min: number, max: number) => fc.double({ min, max, noNaN: true });
const unitOf = (quantity: Quantity): fc.Arbitrary<Unit> => fc.constantFrom(...unitsOf(quantity));

/** `{ <name>_<unit>: value }` in any unit; a hair inside the SI range, so that conversion cannot leave it. */
function quantity(name: string, kind: Quantity, min: number, max: number): fc.Arbitrary<object> {
  const hair = (max - min) * 1e-12;
  return fc
    .tuple(unitOf(kind), inside(min + hair, max - hair))
    .map(([unit, value]) => ({ [`${name}_${unit}`]: fromSi(value, unit) }));
}

function triple(name: string, min: number, max: number): fc.Arbitrary<object> {
  const hair = (max - min) * 1e-12;
  const one = inside(min + hair, max - hair);
  return fc
    .tuple(unitOf('length'), one, one, one)
    .map(([unit, ...values]) => ({ [`${name}_${unit}`]: values.map((value) => fromSi(value, unit)) }));
}

const merged = (...parts: fc.Arbitrary<object>[]) => fc.tuple(...parts).map((all): object => Object.assign({}, ...all));
const maybe = (part: fc.Arbitrary<object>) => fc.oneof(fc.constant({}), part);

const { shape } = fc.letrec<{ shape: object }>((tie) => ({
  shape: fc.oneof(
    { maxDepth: 3, withCrossShrink: true },
    merged(fc.constant({ shape: 'box' }), triple('min', -1, 0), triple('max', 0.001, 1)),
    merged(fc.constant({ shape: 'sphere' }), triple('center', -1, 1), quantity('radius', 'length', 1e-7, 10)),
    merged(fc.constant({ shape: 'ellipsoid' }), triple('center', -1, 1), triple('radii', 1e-7, 10)),
    merged(
      fc.constant({ shape: 'cylinder' }),
      triple('from', -1, 0),
      triple('to', 0.001, 1),
      quantity('radius', 'length', 1e-7, 10),
    ),
    fc.record({ shape: fc.constant('surface'), file: fc.constantFrom('a.stl', '../b é.ply', 'C.OBJ') }),
    fc.record({
      shape: fc.constantFrom('union', 'intersection'),
      parts: fc.array(tie('shape'), { minLength: 1, maxLength: 3 }),
    }),
    fc.record({
      shape: fc.constant('difference'),
      of: tie('shape'),
      minus: fc.array(tie('shape'), { minLength: 1, maxLength: 2 }),
    }),
  ),
}));

const coordinates = fc.tuple(inside(-1, 1), inside(-1, 1), inside(-1, 1));
const points = fc.uniqueArray(coordinates, {
  minLength: 1,
  maxLength: 9,
  selector: (point) => point.map((one) => one + 0).join(),
});
const shareWord = fc.constantFrom({}, { flow_share: 'equal' }, { flow_share: 'territory' });
const terminals = fc.oneof(
  merged(fc.record({ count: fc.integer({ min: 1, max: 20_000_000 }) }), shareWord),
  merged(quantity('spacing', 'length', 1e-7, 10), shareWord),
  merged(
    points.map((all) => ({ points_m: all })),
    shareWord,
  ),
  points.chain((all) =>
    fc
      .option(fc.array(inside(1e-6, 1e6), { minLength: all.length, maxLength: all.length }), { nil: undefined })
      .map((share): object => (share ? { points_m: all, flow_share: share } : { points_m: all })),
  ),
);

const direction = coordinates
  .filter((one) => Math.max(...one.map(Math.abs)) >= 1e-6)
  .map((one): object => ({ direction: one }));

const tree = fc
  .tuple(
    merged(
      triple('position', 1.5, 9),
      quantity('flow', 'flow', 1e-18, 1e-2),
      quantity('pressure', 'pressure', 5000, 1e6),
      maybe(direction),
    ),
    merged(terminals, maybe(quantity('pressure', 'pressure', -1e5, 4999))),
  )
  .map(([inlet, ends]) => ({ inlet, terminals: ends }));

const sizing = fc.oneof(
  fc.constant({}),
  merged(fc.constant({ rule: 'least-power' }), maybe(quantity('maintenance', 'maintenance', 1e-3, 1e9))),
  merged(
    fc.constant({ rule: 'pressure-matched' }),
    maybe(inside(2, 4).map((junction_exponent) => ({ junction_exponent }))),
  ),
  merged(
    fc.constant({ rule: 'junction-exponent' }),
    maybe(inside(2, 4).map((junction_exponent) => ({ junction_exponent }))),
    fc.oneof(
      fc.constant({}),
      quantity('terminal_radius', 'length', 1e-7, 10),
      quantity('inlet_radius', 'length', 1e-7, 10),
    ),
  ),
);

const demandPart = fc
  .tuple(shape, fc.oneof(fc.constant(0), inside(1e-3, 1e3)))
  .map(([part, weight]) => ({ ...part, weight }));

const line = fc.string({ minLength: 1, maxLength: 40, unit: 'grapheme' }).filter((text) => /^\P{Cc}*$/u.test(text));

const spec = fc.record({
  name: line,
  purpose: line,
  seed: fc.oneof(line, fc.integer(), inside(-1e30, 1e30)),
  tissue: fc
    .tuple(shape, fc.array(shape, { maxLength: 2 }), fc.array(demandPart, { maxLength: 2 }))
    .map(([whole, forbidden, demand]) => ({ ...whole, forbidden, demand })),
  trees: fc.array(tree, { minLength: 1, maxLength: 3 }),
  blood: merged(
    quantity('density', 'density', 100, 20_000),
    quantity('value', 'viscosity', 1e-5, 1).map((viscosity) => ({ viscosity })),
  ),
  sizing,
  clearance: quantity('gap', 'length', 0, 1),
  junctions: inside(15, 60).map((min_angle_deg) => ({ min_angle_deg })),
  refine: fc.oneof(fc.constantFrom('none', 'quick', 'thorough'), fc.integer({ min: 0, max: 10_000 })),
});

describe('specs', () => {
  test('a written spec reads back equal to the last bit and writes the same text', () => {
    fc.assert(
      fc.property(spec, (value) => {
        const once = specFromValue(value);
        const text = specToJson(once, { version: '0.1.0' });
        const twice = parseSpec(text);
        // toStrictEqual compares numbers with Object.is, so a lost bit or a lost sign of 0 shows.
        expect(twice).toStrictEqual(once);
        expect(specToJson(twice, { version: '0.1.0' })).toBe(text);
      }),
      { ...SEED, numRuns: 500 },
    );
  });

  test('any text at all is a spec or an InputError with a place and a message', () => {
    const anyText = fc.oneof(
      fc.string(),
      fc.json(),
      fc.string({ unit: fc.constantFrom(...'{}[]:,"\\01e-.tfn \n'.split('')) }),
    );
    fc.assert(
      fc.property(anyText, (text) => expectFaults(() => parseSpec(text))),
      { ...SEED, numRuns: 1000 },
    );
  });

  test('a sound spec with any one value replaced or any key renamed is a spec or an InputError that points there', () => {
    const places = placesOf(soundSpec());
    fc.assert(
      fc.property(
        fc.constantFrom(...places),
        fc.jsonValue(),
        fc.option(fc.string(), { nil: undefined }),
        (place, value, key) => {
          const bent = soundSpec();
          let holder: Bendable = bent;
          for (const step of place.slice(0, -1)) holder = holder[step];
          const last = place[place.length - 1] as string;
          if (key === undefined || Array.isArray(holder)) holder[last] = value;
          else {
            Object.defineProperty(holder, key, {
              value: holder[last],
              enumerable: true,
              configurable: true,
              writable: true,
            });
            if (key !== last) delete holder[last];
          }
          expectFaults(() => specFromValue(bent));
        },
      ),
      { ...SEED, numRuns: 1000 },
    );
  });
});

function expectFaults(run: () => unknown): void {
  try {
    run();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    expect(error.faults.length).toBeGreaterThan(0);
    for (const { where, message } of error.faults) {
      expect(where).not.toBe('');
      expect(message).toMatch(/^got .*, expected /s);
    }
  }
}

/** Paths of every value inside a value. */
function placesOf(value: Bendable, path: readonly (string | number)[] = []): (readonly (string | number)[])[] {
  if (typeof value !== 'object' || value === null) return [];
  return Object.keys(value).flatMap((key) => {
    const at = [...path, Array.isArray(value) ? Number(key) : key];
    return [at, ...placesOf(value[key], at)];
  });
}
