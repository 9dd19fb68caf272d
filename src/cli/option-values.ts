import { InputError, inputError, rowOfVessel, type TreeRecord, toSi, UNITS, type Unit } from '../index.ts';

/** Whole number of an option. */
export function wholeNumber(text: string, option: string, least: number, most: number): number {
  const value = /^\d{1,15}$/.test(text) ? Number(text) : Number.NaN;
  if (value >= least && value <= most) return value;
  throw inputError(
    'out-of-range',
    option,
    `got ${JSON.stringify(text)}, expected a whole number from ${least} to ${most}`,
  );
}

/** Plain number > 0 of an option whose name carries the unit. */
export function positiveNumber(text: string, option: string): number {
  const value = text.trim() === '' ? Number.NaN : Number(text);
  if (value > 0 && value < Number.POSITIVE_INFINITY) return value;
  throw inputError('out-of-range', option, `got ${JSON.stringify(text)}, expected a number > 0`);
}

/** Number of an option, from `least` to `most`. */
export function numberFrom(text: string, option: string, least: number, most: number): number {
  const value = text.trim() === '' ? Number.NaN : Number(text);
  if (value >= least && value <= most) return value;
  throw inputError('out-of-range', option, `got ${JSON.stringify(text)}, expected a number from ${least} to ${most}`);
}

/** A word of an option, one of some. */
export function oneOf<T extends string>(text: string, option: string, words: readonly T[]): T {
  const word = words.find((one) => one === text.trim());
  if (word !== undefined) return word;
  throw inputError('bad-value', option, `got ${JSON.stringify(text)}, expected one of ${words.join(', ')}`);
}

/** Number with a unit after it, such as `3.5mPa_s`; in SI. */
export function quantityOf(text: string, option: string, quantity: (typeof UNITS)[Unit]['quantity']): number {
  const units = (Object.keys(UNITS) as Unit[]).filter((unit) => UNITS[unit].quantity === quantity);
  const match = /^\s*([0-9.]+(?:[eE][+-]?\d+)?)\s*(\w+)\s*$/.exec(text);
  const unit = units.find((one) => one === match?.[2]);
  const value = Number(match?.[1]);
  if (unit !== undefined && value > 0 && value < Number.POSITIVE_INFINITY) return toSi(value, unit);
  const wanted = units.map((one) => `3.5${one}`).join(' or ');
  throw inputError(
    'bad-value',
    option,
    `got ${JSON.stringify(text)}, expected a number > 0 with its unit, such as ${wanted}`,
  );
}

/** What `--refine` asks for. */
export type RefineOption = { readonly word: 'none' | 'quick' | 'thorough' | 'annealed' } | { readonly seconds: number };

export function refineOf(text: string): RefineOption {
  if (text === 'none' || text === 'quick' || text === 'thorough' || text === 'annealed') return { word: text };
  const seconds = /^\d+(\.\d+)?s$/.test(text) ? Number(text.slice(0, -1)) : Number.NaN;
  if (seconds > 0) return { seconds };
  const wanted = 'expected none, quick, thorough, annealed, or seconds such as 20s';
  throw inputError('bad-value', '--refine', `got ${JSON.stringify(text)}, ${wanted}`);
}

/** A vessel and what is taken off its radius. */
export interface NarrowOption {
  readonly row: number;
  /** Of the radius that is taken away, above 0 and below 1. */
  readonly fraction: number;
}

/**
 * Reads `supply:12:0.5` (or `12:0.5`): tree by name or index, vessel number, share of the radius taken away.
 *
 * @throws InputError where the tree has no such vessel
 */
export function narrowOf(text: string, record: TreeRecord): NarrowOption {
  const option = '--narrow';
  const match = /^(?:([^:]+):)?(\d+):([^:]+)$/.exec(text);
  if (match === null) {
    throw inputError(
      'bad-value',
      option,
      `got ${JSON.stringify(text)}, expected <tree>:<vessel>:<fraction>, such as supply:12:0.5`,
    );
  }
  const fraction = Number(match[3]);
  if (!(fraction > 0 && fraction < 1)) {
    const message = `got a fraction of ${JSON.stringify(match[3])}, expected what is taken off the radius: above 0 and below 1`;
    throw inputError('out-of-range', option, message);
  }
  const { forest, names } = record;
  const row = rowOfVessel(forest, Number(match[2]));
  if (row < 0) {
    const most = forest.count - names.length - 1;
    throw inputError('out-of-range', option, `got vessel ${match[2]}, expected one from 0 to ${most}`);
  }
  const own = forest.tree[row]!;
  if (match[1] !== undefined && match[1] !== names[own] && match[1] !== String(own)) {
    const message = names.includes(match[1])
      ? `got vessel ${match[2]} of tree ${match[1]}, but it belongs to ${names[own]}: expected ${names[own]}:${match[2]}`
      : `got tree ${JSON.stringify(match[1])}, expected one of ${names.join(', ')}`;
    throw inputError('bad-value', option, message);
  }
  return { row, fraction };
}

/**
 * Runs something of the library; faults of its options are told by the names they have on the command line.
 *
 * @param names option of the library → where it came from
 */
export function withOptionNames<T>(names: Readonly<Record<string, string>>, step: () => T): T {
  try {
    return step();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw new InputError(error.faults.map((fault) => ({ ...fault, where: names[fault.where] ?? fault.where })));
  }
}
