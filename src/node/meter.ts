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

  /** Times in s, memory in bytes; the costs thinned to a few hundred. */
  read(): { wallTime: number; peakMemory: number } & Pick<Resources, 'stages'> & {
      costAgainstTime: Resources['cost_against_time'];
    } {
    this.#closeStage();
    this.#stage = null;
    const every = Math.ceil(this.#costs.length / 300);
    const last = this.#costs.length - 1;
    return {
      wallTime: this.seconds(),
      peakMemory: process.resourceUsage().maxRSS * 1024,
      stages: this.#stages,
      costAgainstTime: this.#costs.filter((_, k) => k % every === 0 || k === last),
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
