/** A spec text that must be refused, and where the refusal must point. */
export interface BrokenSpec {
  readonly name: string;
  readonly text: string;
  /** The place of one of the faults. */
  readonly where: string | RegExp;
  /** What the message of that fault must contain. */
  readonly says?: RegExp;
}

// Loose on purpose: these values are bent in every way the types forbid.
// biome-ignore lint/suspicious/noExplicitAny: test data that must not fit a type
export type Bendable = any;

/** A faultless spec to bend. */
export function soundSpec(): Bendable {
  return {
    name: 'sound',
    seed: 'sound-1',
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [12, 12, 6] },
    trees: [
      {
        name: 'supply',
        kind: 'supply',
        inlet: { position_mm: [0, 6, 3], direction: [1, 0, 0], pressure_mmHg: 60, flow_mL_min: 1.2 },
        terminals: { count: 20, pressure_mmHg: 20 },
      },
    ],
    blood: { viscosity: { law: 'constant', value_mPa_s: 3.5 }, density_kg_m3: 1060 },
    sizing: { rule: 'pressure-matched', junction_exponent: 3 },
    clearance: { gap_um: 20 },
    junctions: { min_angle_deg: 25 },
    refine: 'quick',
  };
}

/** The text of the sound spec, two spaces a level. */
export const SOUND_TEXT = JSON.stringify(soundSpec(), null, 2);

/** The sound spec bent in one place. */
export function bent(name: string, where: string | RegExp, bend: (spec: Bendable) => void, says?: RegExp): BrokenSpec {
  const spec = soundSpec();
  bend(spec);
  return { name, text: JSON.stringify(spec), where, ...(says ? { says } : {}) };
}

/** The sound spec with another tissue. */
export function withTissue(name: string, where: string | RegExp, tissue: Bendable, says?: RegExp): BrokenSpec {
  return bent(name, where, (spec) => Object.assign(spec, { tissue }), says);
}

/** The sound text with one piece replaced; for what `JSON.stringify` cannot write. */
export function edited(name: string, where: string | RegExp, from: string, to: string, says?: RegExp): BrokenSpec {
  if (!SOUND_TEXT.includes(from)) throw new Error(`the sound spec holds no ${from}`);
  return { name, text: SOUND_TEXT.replace(from, to), where, ...(says ? { says } : {}) };
}
