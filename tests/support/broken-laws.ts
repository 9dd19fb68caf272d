import { type BrokenSpec, bent } from './bend-spec.ts';

/** Blood, sizing, clearance and junctions. */
export const WRONG_LAWS: BrokenSpec[] = [
  bent('blood a word', 'blood', (spec) => Object.assign(spec, { blood: 'red' })),
  bent(
    'another viscosity law',
    'blood.viscosity.law',
    (spec) => Object.assign(spec.blood.viscosity, { law: 'in-vivo' }),
    /does not have it yet/,
  ),
  bent('viscosity law a number', 'blood.viscosity.law', (spec) => Object.assign(spec.blood.viscosity, { law: 1 })),
  bent('viscosity of nothing', 'blood.viscosity.value_mPa_s', (spec) =>
    Object.assign(spec.blood.viscosity, { value_mPa_s: 0 }),
  ),
  bent('viscosity of tar', 'blood.viscosity.value_mPa_s', (spec) =>
    Object.assign(spec.blood.viscosity, { value_mPa_s: 1e9 }),
  ),
  bent(
    'viscosity in poise',
    'blood.viscosity.value_P',
    (spec) => Object.assign(spec.blood.viscosity, { value_P: 0.035 }),
    /"P".*value_mPa_s/,
  ),
  bent(
    'viscosity in pascals',
    'blood.viscosity.value_Pa',
    (spec) => Object.assign(spec.blood.viscosity, { value_Pa: 0.0035 }),
    /unit of pressure/,
  ),
  bent(
    'viscosity twice',
    /^blood\.viscosity\.value_/,
    (spec) => Object.assign(spec.blood.viscosity, { value_Pa_s: 0.0035 }),
    /beside/,
  ),
  bent('viscosity a bare number', 'blood.viscosity', (spec) => Object.assign(spec.blood, { viscosity: 3.5 })),
  bent(
    'density in grams',
    'blood.density_g_cm3',
    (spec) => Object.assign(spec.blood, { density_g_cm3: 1.06 }),
    /density_kg_m3/,
  ),
  bent('density of air', 'blood.density_kg_m3', (spec) => Object.assign(spec.blood, { density_kg_m3: 1.2 })),
  bent(
    'maintenance under blood',
    'blood.maintenance_W_m3',
    (spec) => Object.assign(spec.blood, { maintenance_W_m3: 625 }),
    /unknown key/,
  ),
  bent('strange rule', 'sizing.rule', (spec) => Object.assign(spec.sizing, { rule: 'murray' }), /least-power/),
  bent(
    'misspelt rule',
    'sizing.rule',
    (spec) => Object.assign(spec.sizing, { rule: 'least-powr' }),
    /nearest is "least-power"/,
  ),
  bent(
    'exponent below 2',
    'sizing.junction_exponent',
    (spec) => Object.assign(spec.sizing, { junction_exponent: 1.9 }),
    /2 to 4/,
  ),
  bent(
    'exponent above 4',
    'sizing.junction_exponent',
    (spec) => Object.assign(spec.sizing, { junction_exponent: 4.1 }),
    /2 to 4/,
  ),
  bent('exponent a word', 'sizing.junction_exponent', (spec) =>
    Object.assign(spec.sizing, { junction_exponent: 'three' }),
  ),
  bent(
    'exponent without use',
    'sizing.junction_exponent',
    (spec) => Object.assign(spec, { sizing: { junction_exponent: 3 } }),
    /least-power/,
  ),
  bent(
    'radius without use',
    'sizing.terminal_radius_um',
    (spec) => Object.assign(spec.sizing, { terminal_radius_um: 10 }),
    /junction-exponent/,
  ),
  bent(
    'both radii',
    'sizing.inlet_radius_um',
    (spec) =>
      Object.assign(spec, { sizing: { rule: 'junction-exponent', terminal_radius_um: 10, inlet_radius_um: 90 } }),
    /one of the two/,
  ),
  bent('terminal radius of 0', 'sizing.terminal_radius_um', (spec) =>
    Object.assign(spec, { sizing: { rule: 'junction-exponent', terminal_radius_um: 0 } }),
  ),
  bent('maintenance for nothing', 'sizing.maintenance_W_m3', (spec) =>
    Object.assign(spec.sizing, { maintenance_W_m3: 0 }),
  ),
  bent(
    'maintenance in watts',
    'sizing.maintenance_W',
    (spec) => Object.assign(spec.sizing, { maintenance_W: 1 }),
    /maintenance_W_m3/,
  ),
  bent('negative gap', 'clearance.gap_um', (spec) => Object.assign(spec.clearance, { gap_um: -1 }), /got -1/),
  bent('gap without unit', 'clearance.gap', (spec) => Object.assign(spec.clearance, { gap: 20 }), /gap_um/),
  bent(
    'misspelt gap',
    'clearance.gpa_um',
    (spec) => Object.assign(spec, { clearance: { gpa_um: 20 } }),
    /nearest is gap_um/,
  ),
  bent('clearance a number', 'clearance', (spec) => Object.assign(spec, { clearance: 20 })),
  bent(
    'angle too small',
    'junctions.min_angle_deg',
    (spec) => Object.assign(spec.junctions, { min_angle_deg: 5 }),
    /15 to 60/,
  ),
  bent(
    'angle too wide',
    'junctions.min_angle_deg',
    (spec) => Object.assign(spec.junctions, { min_angle_deg: 90 }),
    /15 to 60/,
  ),
  bent(
    'angle in radians',
    'junctions.min_angle_rad',
    (spec) => Object.assign(spec.junctions, { min_angle_rad: 0.4 }),
    /min_angle_deg/,
  ),
];
