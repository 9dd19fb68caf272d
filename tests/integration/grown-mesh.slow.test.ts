import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { buildProgram, PROGRAM } from '../support/program.ts';

/*
 * The program's own output, more than 200 vessels of it, handed to volume meshers by the commands the README gives.
 * Debian's packages: gmsh tetgen admesh.
 */

describe('a grown tree, meshed', () => {
  const folder = mkdtempSync(join(tmpdir(), 'grown-'));
  const run = (command: string, ...words: string[]) =>
    spawnSync(command, words, { cwd: folder, encoding: 'utf8', maxBuffer: 1 << 28 });
  const program = (...words: string[]) => run(process.execPath, PROGRAM, ...words);
  const readme = readFileSync(new URL('../../README.md', import.meta.url), 'utf8');
  let triangles = 0;

  beforeAll(() => {
    buildProgram();
    expect(program('grow', 'lobe', '--terminals', '110', '--out', 'runs/small').status).toBe(0);
    expect(program('mesh', 'runs/small', '--around', '12', '--out', 'meshes/small').status).toBe(0);
    const { counts } = JSON.parse(readFileSync(join(folder, 'meshes/small/mesh.json'), 'utf8'));
    expect(counts.vessels).toBeGreaterThanOrEqual(200);
    triangles = counts.triangles;
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  it('holds its own check', () => expect(program('check', 'meshes/small').status).toBe(0));

  it('is filled by TetGen as the README says', () => {
    const line = /^ {4}(tetgen .*)$/m.exec(readme)![1]!.split(' ');
    const { stdout, status } = run(line[0]!, ...line.slice(1));
    expect(status).toBe(0);
    expect(stdout).not.toMatch(/intersect|overlap|degenerate|error/i);
    const tetrahedra = readFileSync(join(folder, 'meshes/small/lumen_one_solid.1.ele'), 'utf8');
    expect(Number(tetrahedra.trim().split(/\s+/)[0])).toBeGreaterThan(triangles / 2);
  });

  it('is filled by Gmsh as the README says', () => {
    const lines = /^ {4}(echo .*)\n {4}(gmsh .*)$/m.exec(readme)!;
    const { stdout, stderr, status } = run('sh', '-c', `${lines[1]} && ${lines[2]}`);
    expect(status, stdout + stderr).toBe(0);
    expect(stdout + stderr).not.toMatch(/error/i);
    const counted = /(\d+) nodes (\d+) elements/.exec([...(stdout + stderr).split('\n')].reverse().join('\n'))!;
    expect(Number(counted[2])).toBeGreaterThan(2 * triangles);
  });

  it('leaves admesh nothing to mend', () => {
    const { stdout } = run('admesh', 'meshes/small/lumen_one_solid.stl');
    for (const what of [
      'Total disconnected facets',
      'Degenerate facets',
      'Edges fixed',
      'Facets removed',
      'Facets added',
      'Facets reversed',
      'Backwards edges',
      'Normals fixed',
    ]) {
      const numbers = new RegExp(`${what}\\s*:((?:\\s+\\d+)+)`).exec(stdout)![1]!.trim().split(/\s+/);
      expect(
        numbers.every((number) => number === '0'),
        `${what}: ${numbers}`,
      ).toBe(true);
    }
    expect(stdout).toMatch(/Number of parts\s+:\s+1\s/);
  });
});
