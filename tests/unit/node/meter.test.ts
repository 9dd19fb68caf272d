import { describe, expect, it } from 'vitest';
import { Meter } from '../../../src/node/index.ts';

/** Lets some time pass. */
function wait(ms: number): void {
  const end = performance.now() + ms;
  while (performance.now() < end);
}

describe('Meter', () => {
  it('gives every moment since the first stage to a stage, however often it is read', () => {
    const meter = new Meter();
    for (const stage of ['tissue', 'growth', 'growth', 'refine', 'growth', 'proof']) {
      meter.see({ stage });
      wait(5);
    }
    meter.read();
    wait(5);
    const { stages, wallTime } = meter.read();
    expect(stages.map(({ stage }) => stage)).toEqual(['tissue', 'growth', 'refine', 'proof']);
    expect(stages.find(({ stage }) => stage === 'growth')!.time_s).toBeGreaterThanOrEqual(0.015);
    expect(stages.find(({ stage }) => stage === 'proof')!.time_s).toBeGreaterThanOrEqual(0.01);
    const sum = stages.reduce((whole, { time_s }) => whole + time_s, 0);
    expect(sum).toBeGreaterThan(wallTime - 0.01);
    expect(sum).toBeLessThanOrEqual(wallTime);
  });

  it('keeps a hundred and fifty costs of each stage, the first and the last among them', () => {
    const meter = new Meter();
    for (let k = 0; k < 100_000; k++) meter.cost('growth', k);
    for (let k = 0; k < 40; k++) meter.cost('refine', 1000 - k);
    const { costAgainstTime } = meter.read();
    const costsOf = (of: string) => costAgainstTime.filter(({ stage }) => stage === of).map(({ cost_W }) => cost_W);
    expect(costsOf('refine')).toEqual(Array.from({ length: 40 }, (_, k) => 1000 - k));
    expect(costsOf('growth').length).toBeLessThanOrEqual(151);
    expect(costsOf('growth').length).toBeGreaterThan(75);
    expect([costsOf('growth')[0], costsOf('growth').at(-1)]).toEqual([0, 99_999]);
  });
});
