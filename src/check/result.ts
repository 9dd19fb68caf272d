/** How one promise fared. */
export interface PromiseResult {
  /** Short machine word, e.g. `containment`. */
  readonly id: string;
  readonly title: string;
  /** `at-least`: values below the limit break the promise; `at-most`: values above it. */
  readonly sense: 'at-least' | 'at-most';
  /** In `unit`; the slack for rounding is stated in `note`. */
  readonly limit: number;
  /** `m`, `rad`, `Pa`, `W`, `m³/s`, or `1` for a plain number. */
  readonly unit: string;
  /** Worst value met; null where nothing was measured. */
  readonly worst: number | null;
  /** Vessel `<tree>:<vessel number>`, patch, or tree of the worst value. */
  readonly where: string | null;
  /** null where the promise could not be checked; `note` says why. */
  readonly held: boolean | null;
  /** How many things were looked at. */
  readonly checked: number;
  /** How many of them break the promise; the listed findings may be fewer. */
  readonly failures: number;
  readonly note: string;
}

/** One thing that breaks a promise, or deserves a warning. */
export interface Finding {
  /** Id of the promise. */
  readonly promise: string;
  /** Vessel `<tree>:<vessel number>`, patch, or tree. */
  readonly vessel: string;
  /** The other vessel, where two are concerned. */
  readonly other: string | null;
  /** Row of the forest (or triangle of a mesh), −1 where the finding is not about one. */
  readonly row: number;
  readonly value: number;
  readonly limit: number;
  readonly unit: string;
  readonly message: string;
}

export interface CheckResult {
  /** True if no promise is broken; promises that could not be checked do not count. */
  readonly held: boolean;
  readonly promises: readonly PromiseResult[];
  /** What breaks a promise, at most `cap` a promise; the promise's `failures` is the whole count. */
  readonly findings: readonly Finding[];
  /** What holds but deserves a look. */
  readonly warnings: readonly Finding[];
  /** Figures recomputed on the way, keys with unit suffix, e.g. `pumping_W`. */
  readonly recomputed: Readonly<Record<string, number>>;
}

/** What a tally is told before it sees the first value. */
export interface TallyHead {
  readonly id: string;
  readonly title: string;
  readonly sense: 'at-least' | 'at-most';
  readonly limit: number;
  readonly unit: string;
  /** Slack for rounding, ≥ 0, in `unit`; 0 if left out. */
  readonly tolerance?: number;
  /** Name of a row in messages. */
  readonly nameOf: (row: number) => string;
  /** The sentence of a finding. */
  readonly describe: (value: number, row: number, other: number) => string;
  /** Findings listed, ≥ 0. */
  readonly cap: number;
}

/** Counts what one promise sees. Allocates only for the findings that are listed. */
export class Tally {
  readonly head: TallyHead;
  readonly findings: Finding[] = [];
  checked = 0;
  failures = 0;
  worst = Number.NaN;
  #where: string | null = null;
  #worstRow = -1;
  #seen = false;

  constructor(head: TallyHead) {
    this.head = head;
  }

  /** True if a value breaks the limit; NaN does. */
  breaks(value: number): boolean {
    const { sense, limit, tolerance = 0 } = this.head;
    return sense === 'at-least' ? !(value >= limit - tolerance) : !(value <= limit + tolerance);
  }

  /** Takes one measured value. */
  see(value: number, row: number, other = -1): void {
    this.checked++;
    const worse = this.head.sense === 'at-least' ? !(value >= this.worst) : !(value <= this.worst);
    if (!this.#seen || (worse && !Number.isNaN(this.worst))) {
      this.worst = value;
      this.#worstRow = row;
      this.#where = null;
      this.#seen = true;
    }
    if (!this.breaks(value)) return;
    this.failures++;
    if (this.findings.length >= this.head.cap) return;
    this.findings.push({
      promise: this.head.id,
      vessel: this.head.nameOf(row),
      other: other < 0 ? null : this.head.nameOf(other),
      row,
      value,
      limit: this.head.limit,
      unit: this.head.unit,
      message: this.head.describe(value, row, other),
    });
  }

  /** Records a breach that has its own sentence and place. */
  fail(where: string, row: number, value: number, limit: number, message: string): void {
    this.failures++;
    const worse = this.head.sense === 'at-least' ? value < this.worst : value > this.worst;
    if (!this.#seen || worse) {
      this.worst = value;
      this.#where = where;
      this.#seen = true;
    }
    if (this.findings.length >= this.head.cap) return;
    const { id, unit } = this.head;
    this.findings.push({ promise: id, vessel: where, other: null, row, value, limit, unit, message });
  }

  /** The promise as it stands. */
  close(note = ''): PromiseResult {
    const { id, title, sense, limit, unit } = this.head;
    const where = this.#seen ? (this.#where ?? (this.#worstRow < 0 ? null : this.head.nameOf(this.#worstRow))) : null;
    return {
      id,
      title,
      sense,
      limit,
      unit,
      worst: this.#seen ? this.worst : null,
      where,
      held: this.failures === 0,
      checked: this.checked,
      failures: this.failures,
      note,
    };
  }

  /** The promise when it cannot be checked. */
  skip(why: string): PromiseResult {
    const { id, title, sense, limit, unit } = this.head;
    const empty = { worst: null, where: null, held: null, checked: 0, failures: 0 };
    return { id, title, sense, limit, unit, ...empty, note: `not checked: ${why}` };
  }
}

/** Puts promises and their tallies together. */
export function gatherResult(
  promises: readonly PromiseResult[],
  tallies: readonly Tally[],
  warnings: readonly Finding[],
  recomputed: Readonly<Record<string, number>>,
): CheckResult {
  return {
    held: promises.every((promise) => promise.held !== false),
    promises,
    findings: tallies.flatMap((tally) => tally.findings),
    warnings,
    recomputed,
  };
}
