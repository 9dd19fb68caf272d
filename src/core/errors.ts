/** One thing wrong with what the caller gave. */
export interface Fault {
  /** Short machine word, e.g. `unknown-key`, `out-of-range`, `open-surface`. */
  readonly code: string;
  /** A spec path (`tissue.radius_mm`), `file`, `file:line` or a command-line option. */
  readonly where: string;
  /** What was got, then what was wanted: `got -2, expected > 0`. */
  readonly message: string;
}

/** The caller's fault. Carries every fault found, so that all can be mended in one go. */
export class InputError extends Error {
  readonly faults: readonly Fault[];

  /** @param faults at least one */
  constructor(faults: readonly Fault[]) {
    super(faults.map((fault) => `${fault.where}: ${fault.message}`).join('\n'));
    this.name = 'InputError';
    this.faults = faults;
  }
}

/** An InputError of a single fault. */
export function inputError(code: string, where: string, message: string): InputError {
  return new InputError([{ code, where, message }]);
}

/** Our own fault: the message names the function, the row and the seed, so that it can be replayed. */
export class InvariantError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'InvariantError';
  }
}
