import { describe, expect, it } from 'vitest';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeFillScript } from '../../../../src/formats/solver/fill-script.ts';
import { encodeOpenfoamCase } from '../../../../src/formats/solver/openfoam-case.ts';
import { boundaryTable } from '../../../../src/mesh/boundary-table.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { forkSketch, sketchForest } from '../../../support/lumen-forests.ts';

const text = (bytes: Uint8Array) => new TextDecoder().decode(bytes);
const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));

describe.each(['supply', 'drain'] as const)('the case of a %s tree', (kind) => {
  const field = solveFlow(forest, [kind], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
  const mesh = buildLumen(forest, { around: 12, kinds: [kind] });
  const boundary = boundaryTable(mesh, forest, field, 1060);
  const made = (profile: 'flat' | 'parabolic', unit: 'm' | 'mm' = 'm') =>
    new Map(
      encodeOpenfoamCase({
        boundary,
        density: 1060,
        viscosity: 3.5e-3,
        profile,
        unit,
      }).map(({ name, bytes }) => [name, text(bytes)]),
    );

  it('has every cap once in both fields, and no other patch but the wall', () => {
    for (const name of ['openfoam/0/U', 'openfoam/0/p']) {
      const patches = [
        ...made('flat')
          .get(name)!
          .matchAll(/^ {4}(\w+) \{/gm),
      ].map((match) => match[1]!);
      expect(patches.toSorted()).toEqual(mesh.patches.map((patch) => patch.name).toSorted());
    }
  });

  it('sets the flow of the table at inlets, and the pressure over the density at outlets', () => {
    for (const { patch, type, flow, pressure } of boundary) {
      const line = (file: string) => new RegExp(`^ {4}${patch} .*$`, 'm').exec(made('flat').get(file)!)![0];
      const number = (of: string, before: string) => Number(new RegExp(`${before} (\\S+);`).exec(of)![1]);
      if (type === 'inlet') expect(number(line('openfoam/0/U'), 'constant')).toBe(flow);
      else expect(number(line('openfoam/0/p'), 'uniform')).toBe(pressure / 1060);
    }
    expect(made('flat').get('openfoam/constant/transportProperties')).toContain(`nu ${3.5e-3 / 1060};`);
  });

  it('has the profile develop where it is asked for', () => {
    const inlets = boundary.filter(({ type }) => type === 'inlet').length;
    const count = (profile: 'flat' | 'parabolic', word: string) =>
      made(profile).get('openfoam/0/U')!.split(`extrapolateProfile ${word};`).length - 1;
    expect([count('flat', 'yes'), count('flat', 'no')]).toEqual([0, inlets]);
    expect([count('parabolic', 'yes'), count('parabolic', 'no')]).toEqual([inlets, 0]);
  });

  it('is scaled where the surface is not in metres', () => {
    expect(made('flat').get('openfoam/run.sh')).not.toContain('transformPoints');
    expect(made('flat', 'mm').get('openfoam/run.sh')).toContain("-scale '(0.001 0.001 0.001)'");
  });
});

it('has Gmsh keep the names of the patches, and name the volume', () => {
  expect(text(encodeFillScript())).toMatch(/Merge "lumen.msh";[\s\S]*Physical Volume\("lumen"\)/);
});
