type Writers = 'set' | 'fill' | 'copyWithin' | 'reverse' | 'sort';

/** Float64Array that its holder cannot write through. */
export type Reals = Omit<Float64Array, number | Writers> & { readonly [i: number]: number };
/** Int32Array that its holder cannot write through. */
export type Rows = Omit<Int32Array, number | Writers> & { readonly [i: number]: number };
