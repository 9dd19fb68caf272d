import validator from 'gltf-validator';
import { BufferAttribute, Mesh, MeshStandardMaterial, Vector3 } from 'three';
import { GLTFLoader } from 'three/examples/jsm/loaders/GLTFLoader.js';
import { describe, expect, it } from 'vitest';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { patchColour, scaleColour } from '../../../../src/formats/mesh/colours.ts';
import { COLOUR_BY, encodeGlb } from '../../../../src/formats/mesh/glb.ts';
import { surfaceOfLumen } from '../../../../src/formats/mesh/mesh-surface.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { forkSketch, sketchForest } from '../../../support/lumen-forests.ts';
import { glbChunks, glbNumbers } from '../../../support/mesh-readers.ts';

const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));
const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
const surface = surfaceOfLumen(buildLumen(forest), forest, field, 'mm');
const faces = surface.patch.length;
const NAMES = ['wall', 'inlet_0', 'outlet_1', 'outlet_2'];

describe('encodeGlb', () => {
  // Source: glTF 2.0 Specification, as the Khronos Group's own validator reads it.
  it.each(COLOUR_BY)('with colours by %s leaves the validator nothing to say', async (by) => {
    const { issues, info } = await validator.validateBytes(encodeGlb(surface, by));
    expect(issues.messages).toEqual([]);
    expect(issues).toMatchObject({ numErrors: 0, numWarnings: 0, numInfos: 0, numHints: 0 });
    expect(info).toMatchObject({ version: '2.0', drawCallCount: 4, materialCount: 4, totalTriangleCount: faces });
  });

  it('is refused by the validator once a bound or a length is wrong', async () => {
    const bytes = encodeGlb(surface);
    const text = new TextDecoder('latin1').decode(bytes);
    const spoilt = bytes.slice();
    // A digit of the greatest x of the wall.
    const at = text.indexOf('"max":[') + '"max":['.length + 3;
    spoilt[at] = spoilt[at] === 0x31 ? 0x32 : 0x31;
    expect((await validator.validateBytes(spoilt)).issues.numErrors).toBeGreaterThan(0);
    expect((await validator.validateBytes(bytes.subarray(0, bytes.length - 4))).issues.numErrors).toBeGreaterThan(0);
  });

  it('is loaded by three.js as a mesh a patch, in metres, walls smooth and caps flat', async () => {
    const bytes = encodeGlb(surface);
    const { scene } = await new GLTFLoader().parseAsync(bytes.slice().buffer, '');
    const meshes: Mesh[] = [];
    scene.traverse((one) => {
      if (one instanceof Mesh) meshes.push(one);
    });
    expect(meshes.map((one) => (one.material as MeshStandardMaterial).name)).toEqual(NAMES);
    let seen = 0;
    const wall: number[] = [];
    for (const one of meshes) {
      expect(one.material).toBeInstanceOf(MeshStandardMaterial);
      const [position, normal] = ['position', 'normal'].map((name) => one.geometry.getAttribute(name));
      expect(position).toBeInstanceOf(BufferAttribute);
      const index = one.geometry.getIndex()!;
      seen += index.count / 3;
      const at = (of: typeof position, i: number) => new Vector3().fromBufferAttribute(of!, index.getX(i));
      const flat = at(normal, 0);
      for (let i = 0; i < index.count; i += 3) {
        const [a, b, c] = [at(position, i), at(position, i + 1), at(position, i + 2)];
        const face = b.sub(a).cross(c.sub(a)).normalize();
        const name = (one.material as MeshStandardMaterial).name;
        for (let k = 0; k < 3; k++) {
          const cosine = at(normal, i + k).dot(face);
          expect(cosine).toBeGreaterThan(name === 'wall' ? 0.5 : 1 - 1e-6);
          if (name === 'wall') wall.push(cosine);
          if (name !== 'wall') expect(at(normal, i + k).distanceTo(flat)).toBeLessThan(1e-6);
        }
      }
    }
    expect(seen).toBe(faces);
    // 24 facets round: a corner's normal lies half a facet's turn from those beside it, π/24; more in the fork.
    wall.sort((a, b) => a - b);
    expect(Math.acos(wall[Math.floor(wall.length / 2)]!)).toBeCloseTo(Math.PI / 24, 1);
    expect(wall[0]).toBeLessThan(1 - 1e-3);
  });

  it('colours patches apart, each by one factor', () => {
    const { json } = glbChunks(encodeGlb(surface));
    const factors = json.materials.map((one) => one.pbrMetallicRoughness.baseColorFactor);
    expect(factors).toEqual(NAMES.map((_, p) => [...patchColour(p), 1]));
    expect(new Set(factors.map(String)).size).toBe(4);
    expect(json.meshes[0]!.extras).toEqual({ length_unit: 'm', colour_by: 'patch' });
  });

  it('colours corners by pressure from the least to the greatest, which it states', () => {
    const chunks = glbChunks(encodeGlb(surface, 'pressure'));
    const [low, high] = [Math.min(...surface.pressure!), Math.max(...surface.pressure!)];
    expect(high).toBeCloseTo(8000, 9);
    expect(chunks.json.meshes[0]!.extras).toEqual({
      length_unit: 'm',
      colour_by: 'pressure',
      low_Pa: low,
      high_Pa: high,
    });
    expect(chunks.json.materials.map((one) => one.pbrMetallicRoughness.baseColorFactor)).toEqual(
      NAMES.map(() => [1, 1, 1, 1]),
    );
    const values = new Map<string, number>();
    surface.pressure!.forEach((p, v) => {
      const place = [...surface.position.subarray(3 * v, 3 * v + 3)].map((x) => Math.fround(x / 1000));
      values.set(place.join(), p);
    });
    let looked = 0;
    for (const { attributes } of chunks.json.meshes[0]!.primitives) {
      const places = glbNumbers(chunks, attributes.POSITION!);
      glbNumbers(chunks, attributes.COLOR_0!).forEach((colour, i) => {
        const t = (values.get(places[i]!.join())! - low) / (high - low);
        expect(colour).toEqual([...scaleColour(t).map((x) => Math.round(65_535 * x)), 65_535]);
        looked++;
      });
    }
    expect(looked).toBeGreaterThan(surface.position.length / 3);
  });

  it('refuses a quantity that the surface does not hold', () => {
    const bare = { ...surface, wallShear: null };
    expect(() => encodeGlb(bare, 'wall-shear')).toThrow(
      /colourBy: got wall-shear, which this surface does not hold, expected patch/,
    );
    expect(encodeGlb(bare, 'pressure').length).toBeGreaterThan(1000);
  });
});

describe('scaleColour', () => {
  it('grows lighter all the way, from dark blue to straw', () => {
    // Relative luminance of linear light with the primaries of sRGB (IEC 61966-2-1).
    const luminance = ([r, g, b]: readonly number[]) => 0.2126 * r! + 0.7152 * g! + 0.0722 * b!;
    const steps = Array.from({ length: 101 }, (_, i) => luminance(scaleColour(i / 100)));
    for (let i = 1; i < steps.length; i++) expect(steps[i]).toBeGreaterThan(steps[i - 1]!);
    const [low, high] = [scaleColour(0), scaleColour(1)];
    expect(low[2]).toBeGreaterThan(low[0]);
    expect(high[2]).toBeLessThan(high[0]);
    expect(scaleColour(-1)).toEqual(low);
    expect(scaleColour(Number.NaN)).toEqual(low);
    expect(scaleColour(7)).toEqual(high);
  });
});
