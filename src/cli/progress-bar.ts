import { Presets, SingleBar } from 'cli-progress';
import type { Progress } from '../index.ts';
import { Pace } from './pace.ts';

/** Stages whose steps are terminals: those are shown, with how many a second. */
const BY_TERMINALS = ['growth', 'proof'];

/** A bar a stage on standard error, with what is done, how fast, and the time left. */
export class ProgressBar {
  #bar: SingleBar | null = null;
  #stage = '';
  #pace = new Pace();

  show(progress: Progress | null): void {
    if (progress === null) {
      this.#stop();
      return;
    }
    const { stage, done, total } = progress;
    if (stage !== this.#stage || this.#bar === null) {
      this.#stop();
      this.#stage = stage;
      this.#bar = new SingleBar(
        {
          format: '{stage} {bar} {percentage}%{told}',
          stream: process.stderr,
          clearOnComplete: true,
          hideCursor: true,
          gracefulExit: false,
          formatValue: (value, _, type) => (type === 'percentage' ? String(value).padStart(3) : String(value)),
        },
        Presets.shades_classic,
      );
      this.#pace = new Pace();
      this.#bar.start(Math.max(total, 1), done, { stage: stage.padEnd(9), told: '' });
    }
    this.#pace.see(performance.now() / 1000, done, total);
    this.#bar.setTotal(Math.max(total, 1));
    this.#bar.update(done, { told: describeProgress(progress, this.#pace) });
  }

  #stop(): void {
    this.#bar?.stop();
    this.#bar = null;
    this.#stage = '';
  }
}

/** What stands behind the bar: `  12,000 of 100,000 terminals, 8,100 a second, about 11 s left`. */
export function describeProgress({ stage, done, total }: Progress, pace: Pace): string {
  const parts: string[] = [];
  if (BY_TERMINALS.includes(stage)) {
    parts.push(`${grouped(done)} of ${grouped(total)} terminals`);
    if (pace.rate > 0) parts.push(`${grouped(Number(pace.rate.toPrecision(3)))} a second`);
  }
  const { left } = pace;
  if (left !== null) parts.push(`about ${roughly(left)} left`);
  return parts.length === 0 ? '' : `  ${parts.join(', ')}`;
}

function roughly(seconds: number): string {
  if (seconds < 90) return `${Math.round(seconds)} s`;
  const minutes = Math.round(seconds / 60);
  return minutes < 90 ? `${minutes} min` : `${(seconds / 3600).toFixed(1)} h`;
}

/** Digits in threes, the same whatever the machine's language. */
function grouped(value: number): string {
  return String(Math.round(value)).replace(/\B(?=(\d{3})+$)/g, ',');
}
