import { InvariantError } from '../core/errors.ts';

/*
 * The tube whose pumping and blood-keeping power together are least, constant viscosity.
 *
 * Per length: f(r) = 8μQ²/(πr⁴) + mπr². From f′ = 0: r⁶ = 16μQ²/(π²m). There keeping costs twice as much as pumping,
 * wall shear is √(mμ) whatever the flow, and f = K·Q^(2/3).
 * Source of the whole file: C. D. Murray (1926), PNAS 12:207–214; from memory, re-derived.
 */

/**
 * Radius at which a tube of the given flow costs least.
 *
 * @param flow        m³/s, ≥ 0
 * @param viscosity   Pa·s, > 0, constant
 * @param maintenance W/m³, > 0, power that keeping blood costs
 * @returns           m
 * @throws InvariantError if viscosity or maintenance is not positive, or flow negative
 */
export function leastPowerRadius(flow: number, viscosity: number, maintenance: number): number {
  assertPositive('leastPowerRadius', viscosity, maintenance);
  if (!(flow >= 0)) throw new InvariantError(`leastPowerRadius: flow ${flow} m³/s, expected ≥ 0`);
  return Math.cbrt((4 * flow * Math.sqrt(viscosity / maintenance)) / Math.PI);
}

/**
 * K in cost per length = K·Q^(2/3) of least-power tubes.
 *
 * @param viscosity   Pa·s, > 0
 * @param maintenance W/m³, > 0
 * @returns           W/m per (m³/s)^(2/3)
 */
export function leastPowerCostFactor(viscosity: number, maintenance: number): number {
  assertPositive('leastPowerCostFactor', viscosity, maintenance);
  return 1.5 * Math.cbrt(16 * Math.PI * viscosity * maintenance * maintenance);
}

/**
 * Q^(2/3): what a length of least-power tube costs, but for the factor K.
 *
 * @param flow m³/s, ≥ 0
 * @returns    (m³/s)^(2/3)
 * Cost: O(1), allocates nothing, checks nothing: growth calls it millions of times.
 */
export function flowWeight(flow: number): number {
  const root = Math.cbrt(flow);
  return root * root;
}

/**
 * Wall shear in every least-power tube.
 *
 * @param viscosity   Pa·s, > 0
 * @param maintenance W/m³, > 0
 * @returns           Pa
 */
export function leastPowerShear(viscosity: number, maintenance: number): number {
  assertPositive('leastPowerShear', viscosity, maintenance);
  return Math.sqrt(viscosity * maintenance);
}

/**
 * Maintenance power at which least-power tubes have the given wall shear.
 *
 * @param shear     Pa, > 0
 * @param viscosity Pa·s, > 0
 * @returns         W/m³
 */
export function maintenanceForShear(shear: number, viscosity: number): number {
  assertPositive('maintenanceForShear', viscosity, shear);
  return (shear * shear) / viscosity;
}

function assertPositive(name: string, viscosity: number, other: number): void {
  if (!(viscosity > 0 && other > 0)) {
    throw new InvariantError(`${name}: got ${viscosity} Pa·s and ${other}, expected both > 0`);
  }
}
