import { InvariantError } from '../core/errors.ts';

/*
 * Steady laminar flow in a straight rigid tube of circular section.
 *
 * Source of the whole file: Hagen–Poiseuille law, any text of fluid mechanics; from memory, re-derived.
 * Holds for: Reynolds number below about 2000, length well above radius.
 */

/**
 * Pressure drop per unit flow.
 *
 * @param length    m, ≥ 0
 * @param radius    m, > 0
 * @param viscosity Pa·s, dynamic, constant along the tube
 * @returns         Pa·s/m³; 0 for a tube of no length
 * @throws InvariantError if radius ≤ 0
 */
export function tubeResistance(length: number, radius: number, viscosity: number): number {
  assertRadius('tubeResistance', radius);
  const square = radius * radius;
  return (8 * viscosity * length) / (Math.PI * square * square);
}

/**
 * Shear stress at the wall.
 *
 * @param flow      m³/s
 * @param radius    m, > 0
 * @param viscosity Pa·s
 * @returns         Pa, with the sign of the flow
 */
export function wallShear(flow: number, radius: number, viscosity: number): number {
  assertRadius('wallShear', radius);
  return (4 * viscosity * flow) / (Math.PI * radius * radius * radius);
}

/**
 * Mean of the velocity over the section; on the axis it is twice this.
 *
 * @param flow   m³/s
 * @param radius m, > 0
 * @returns      m/s
 */
export function meanVelocity(flow: number, radius: number): number {
  assertRadius('meanVelocity', radius);
  return flow / (Math.PI * radius * radius);
}

/**
 * Reynolds number by diameter and mean velocity.
 *
 * @param flow      m³/s
 * @param radius    m, > 0
 * @param viscosity Pa·s, > 0
 * @param density   kg/m³
 * @returns         dimensionless
 */
export function reynolds(flow: number, radius: number, viscosity: number, density: number): number {
  assertRadius('reynolds', radius);
  return (2 * density * flow) / (Math.PI * radius * viscosity);
}

/**
 * Power that drives a flow through a tube.
 *
 * @param flow      m³/s
 * @param length    m, ≥ 0
 * @param radius    m, > 0
 * @param viscosity Pa·s
 * @returns         W
 */
export function pumpingPower(flow: number, length: number, radius: number, viscosity: number): number {
  return tubeResistance(length, radius, viscosity) * flow * flow;
}

/**
 * Radius of the tube that carries a flow with a given pressure drop.
 *
 * @param flow      m³/s, > 0
 * @param length    m, > 0
 * @param viscosity Pa·s, > 0
 * @param drop      Pa, > 0
 * @returns         m
 */
export function radiusForDrop(flow: number, length: number, viscosity: number, drop: number): number {
  if (!(drop > 0)) throw new InvariantError(`radiusForDrop: drop ${drop} Pa, expected > 0`);
  return Math.sqrt(Math.sqrt((8 * viscosity * length * flow) / (Math.PI * drop)));
}

function assertRadius(name: string, radius: number): void {
  if (!(radius > 0)) throw new InvariantError(`${name}: radius ${radius} m, expected > 0`);
}
