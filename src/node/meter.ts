import type { Progress, Report } from '../index.ts';

type Resources = Report['resources'];

/** Takes the times of a run by the clock, for the one object of its report that may differ from run to run. */
export class Meter {
  readonly #begin = performance.now();
  readonly #stages: { stage: string; time_s: number }[] = [];
  readonly #costs: { stage: string; time_s: number; cost_W: number }[] = [];
  #stage: string | null = null;
  #since = 0;

  /** s since the meter was made. */
  seconds(): number {
    return (performance.now() - this.#begin) / 1000;
  }

  /** Notes that a stage is under way. */
  see({ stage }: Pick<Progress, 'stage'>): void {
    if (stage === this.#stage) return;
    this.#closeStage();
    this.#stage = stage;
    this.#since = this.seconds();
  }

  /** Notes a cost in W. */
  cost(stage: string, cost: number): void {
    this.#costs.push({ stage, time_s: this.seconds(), cost_W: cost });
  }

  /** Times in s, memory in bytes; the costs of each stage thinned to some hundred. The stage under way goes on. */
  read(): { wallTime: number; peakMemory: number } & Pick<Resources, 'stages'> & {
      costAgainstTime: Resources['cost_against_time'];
    } {
    const stage = this.#stage;
    this.#closeStage();
    this.#stage = stage;
    this.#since = this.seconds();
    return {
      wallTime: this.#since,
      peakMemory: process.resourceUsage().maxRSS * 1024,
      stages: this.#stages.map((one) => ({ ...one })),
      costAgainstTime: thinned(this.#costs),
    };
  }

  /** Time of a stage that comes again is added to it. */
  #closeStage(): void {
    if (this.#stage === null) return;
    const time = this.seconds() - this.#since;
    const known = this.#stages.find((one) => one.stage === this.#stage);
    if (known) known.time_s += time;
    else this.#stages.push({ stage: this.#stage, time_s: time });
  }
}

/** Most costs kept of a stage. */
const KEPT = 150;

/** Costs at about even steps of each stage, the first and the last of it among them. */
function thinned<Point extends { readonly stage: string }>(costs: readonly Point[]): Point[] {
  const counts = new Map<string, number>();
  for (const { stage } of costs) counts.set(stage, (counts.get(stage) ?? 0) + 1);
  const seen = new Map<string, number>();
  return costs.filter(({ stage }) => {
    const k = seen.get(stage) ?? 0;
    seen.set(stage, k + 1);
    const count = counts.get(stage)!;
    return k % Math.ceil(count / KEPT) === 0 || k === count - 1;
  });
}
