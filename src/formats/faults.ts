import { type Fault, InputError } from '../core/errors.ts';

/** How many faults of a file are told apart; a file with a million bad rows needs no million lines. */
const MOST = 20;

/** Faults found while a file is read, so that all are told at once. */
export class FaultList {
  readonly #faults: Fault[] = [];
  #more = 0;

  /**
   * @param where `file`, `file:line` or a place in the file
   * @param message what was got, then what was wanted
   */
  add(code: string, where: string, message: string): void {
    if (this.#faults.length < MOST) this.#faults.push({ code, where, message });
    else this.#more++;
  }

  get count(): number {
    return this.#faults.length + this.#more;
  }

  /** @throws InputError with what was found, if anything was */
  throwIfAny(): void {
    const last = this.#faults.at(-1);
    if (last === undefined) return;
    const faults = this.#faults.slice();
    if (this.#more > 0) faults.push({ code: 'more', where: last.where, message: `and ${this.#more} more faults` });
    throw new InputError(faults);
  }
}
