/** How a quantity's values become places between 0 and 1. `low` < `high`; a log scale has `low` > 0. */
export interface Scale {
  readonly low: number;
  readonly high: number;
  readonly log: boolean;
}

/**
 * A usable scale from what was asked: ends in order, apart from each other, and above zero on a log scale.
 *
 * @param leastPositive least value above 0 in the data, where a log scale starts that was asked to start lower
 */
export function mendScale(low: number, high: number, log: boolean, leastPositive: number): Scale {
  let from = Math.min(low, high);
  let to = Math.max(low, high);
  if (log && !(from > 0)) from = leastPositive > 0 ? leastPositive : to > 0 ? to / 10 : 0.1;
  if (log && to < from) to = from;
  if (from === to) {
    const spread = from === 0 ? 1 : 0.05 * Math.abs(from);
    from -= spread;
    to += spread;
  }
  return { low: from, high: to, log };
}

/** Place of a value on a scale, 0 at its low end, 1 at its high end, not clamped. */
export function placeOf(scale: Scale, value: number): number {
  if (scale.log) return Math.log(value / scale.low) / Math.log(scale.high / scale.low);
  return (value - scale.low) / (scale.high - scale.low);
}

/** Step of the form 1, 2 or 5 times a power of ten that gives at most `most` intervals over `span`. */
export function niceStep(span: number, most: number): number {
  const decade = 10 ** Math.floor(Math.log10(span / most));
  for (const step of [1, 2, 5]) if (span / (step * decade) <= most * (1 + 1e-9)) return step * decade;
  return 10 * decade;
}

/**
 * Round values within a scale, rising: multiples of a 1-2-5 step; on a log scale whole decades, joined by their twos
 * and fives where that stays within `most`, thinned where the decades alone are too many. A log scale that spans too
 * little to hold two such values gets the linear ones.
 */
export function ticksOf(scale: Scale, most: number): number[] {
  if (scale.log) {
    const first = Math.floor(Math.log10(scale.low) - 1e-9);
    const last = Math.ceil(Math.log10(scale.high) + 1e-9);
    for (const parts of [[1, 2, 5], [1, 3], [1]]) {
      const ticks: number[] = [];
      for (let e = first; e <= last; e++) for (const part of parts) ticks.push(tidy(part * 10 ** e));
      const inside = ticks.filter((tick) => within(scale, tick));
      if (inside.length < 2) break;
      if (inside.length <= most) return inside;
      if (parts.length === 1) {
        const every = Math.ceil(inside.length / most);
        return inside.filter((_, i) => i % every === 0);
      }
    }
  }
  const step = niceStep(scale.high - scale.low, most);
  const ticks: number[] = [];
  const end = Math.floor(scale.high / step + 1e-9);
  for (let i = Math.ceil(scale.low / step - 1e-9); i <= end; i++) ticks.push(tidy(i * step));
  return ticks;
}

/** Drops what binary arithmetic left in the last digits: 0.30000000000000004 becomes 0.3. */
function tidy(value: number): number {
  return Number(value.toPrecision(12));
}

function within(scale: Scale, value: number): boolean {
  return value >= scale.low * (1 - 1e-9) && value <= scale.high * (1 + 1e-9);
}
