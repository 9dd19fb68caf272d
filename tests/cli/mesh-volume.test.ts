import { readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch } from '../support/run-cli.ts';

let scratch: Scratch;
let run: string;
beforeAll(async () => {
  scratch = makeScratch();
  const spec = soundSpec();
  spec.trees[0].inlet.pressure_mmHg = 20.2;
  spec.trees[0].terminals.count = 3;
  writeFileSync(scratch.path('spec.json'), JSON.stringify(spec));
  run = scratch.path('run');
  await runCli(['grow', scratch.path('spec.json'), '--out', run]);
});
afterAll(() => scratch.remove());

describe('mesh --volume', () => {
  test('writes a volume mesh that the check finds sound, in drawn-out vessels too', async () => {
    const words = ['--volume', '--layers', '2', '--layer-growth', '1.3', '--around', '16', '--extend', '2'];
    const { code, out, err } = await runCli(['mesh', run, ...words, '--out', scratch.path('mesh')]);
    expect({ code, err }, out).toEqual({ code: 0, err: '' });
    expect(out).toMatch(/volume: \d+ cells \(\d+ prisms, \d+ pyramids, \d+ tetrahedra\), least scaled Jacobian 0\.\d/);
    const notes = JSON.parse(readFileSync(scratch.path('mesh', 'mesh.json'), 'utf8'));
    expect(notes.volume).toMatchObject({ layers: 2, layer_growth: 1.3 });
    expect(notes.volume.layer_thickness[1] / notes.volume.layer_thickness[0]).toBeCloseTo(1.3, 9);
    const check = JSON.parse((await runCli(['check', scratch.path('mesh'), '--json'])).out);
    const ids = check.promises.filter(({ held }: { held: boolean }) => held).map(({ id }: { id: string }) => id);
    expect(ids).toEqual(expect.arrayContaining(['volume-cells', 'volume-boundary', 'volume-caps', 'volume-sections']));
  });

  test('refuses layers without a volume, and counts out of range', async () => {
    const mesh = (...words: string[]) => runCli(['mesh', run, ...words, '--out', scratch.path('none')]);
    expect((await mesh('--layers', '3')).err).toContain('--layers: got it without --volume');
    expect((await mesh('--layer-growth', '1.5')).err).toContain('--layer-growth: got it without --volume');
    const { code, err } = await mesh('--volume', '--layers', '21');
    expect({ code, err }).toEqual({ code: 2, err: expect.stringMatching(/--layers: got .*21/) });
  });
});
