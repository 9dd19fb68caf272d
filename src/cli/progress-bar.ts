import { Presets, SingleBar } from 'cli-progress';
import type { Progress } from '../index.ts';

/** A bar a stage on standard error, with the time left. */
export class ProgressBar {
  #bar: SingleBar | null = null;
  #stage = '';
  #begin = 0;

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
          format: '{stage} {bar} {percentage}% {left}',
          stream: process.stderr,
          clearOnComplete: true,
          hideCursor: true,
          gracefulExit: false,
          etaBuffer: 50,
          formatValue: (value, _, type) => (type === 'percentage' ? String(value).padStart(3) : String(value)),
        },
        Presets.shades_classic,
      );
      this.#begin = performance.now();
      this.#bar.start(Math.max(total, 1), done, { stage: stage.padEnd(9), left: '' });
      return;
    }
    this.#bar.setTotal(Math.max(total, 1));
    this.#bar.update(done, { left: this.#left(done / total) });
  }

  /** By the mean pace so far. */
  #left(share: number): string {
    const spent = (performance.now() - this.#begin) / 1000;
    if (!(share > 0.01) || spent < 1) return '';
    const seconds = Math.max(0, Math.round((spent * (1 - share)) / share));
    const text = seconds < 90 ? `${seconds} s` : `${Math.round(seconds / 60)} min`;
    return `about ${text} left`;
  }

  #stop(): void {
    this.#bar?.stop();
    this.#bar = null;
    this.#stage = '';
  }
}
