import * as three from 'three';
import { type Colour, type Palette, paletteBytes } from './colours.ts';
import { ROW_VESSELS, type Scene } from './scene.ts';
import { TUBE_FRAGMENT, TUBE_VERTEX } from './tube-shaders.ts';

/** Least width in pixels at which a vessel is drawn, so that thin ones do not break up into dots. */
export const LEAST_PIXELS = 1.2;

/** All vessels of one scene as one draw. */
export interface Tubes {
  readonly mesh: three.Mesh;
  readonly uniforms: TubeUniforms;
  /** Sends columns of the scene to the card again after they were written. */
  resend(what: 'ends' | 'marks' | 'values'): void;
  setPalette(palette: Palette): void;
  dispose(): void;
}

function startUniforms(scene: Scene, maps: Record<'endsMap' | 'valuesMap' | 'marksMap' | 'palette', three.Texture>) {
  return {
    endsMap: { value: maps.endsMap },
    valuesMap: { value: maps.valuesMap },
    marksMap: { value: maps.marksMap },
    palette: { value: maps.palette },
    eye: { value: new three.Vector3() },
    forward: { value: new three.Vector3() },
    right: { value: new three.Vector3() },
    up: { value: new three.Vector3() },
    rightEdge: { value: new three.Vector3() },
    topEdge: { value: new three.Vector3() },
    perspective: { value: true },
    pixel: { value: 0 },
    leastPixels: { value: LEAST_PIXELS },
    thinnest: { value: 0 },
    lowestOrder: { value: 1 },
    plane: { value: new three.Vector4(0, 0, 0, 1) },
    depthRow: { value: new three.Vector4() },
    clipRow: { value: new three.Vector4() },
    nearest: { value: 0 },
    range: { value: new three.Vector2(0, Math.max(1, scene.highestOrder)) },
    logScale: { value: false },
    hasWay: { value: false },
    paper: { value: new three.Vector3() },
    ink: { value: new three.Vector3() },
    accent: { value: new three.Vector3() },
  };
}
export type TubeUniforms = ReturnType<typeof startUniforms>;

export interface TubeColours {
  readonly paper: Colour;
  readonly ink: Colour;
  readonly accent: Colour;
}

/** Two triangles on the corners 4v … 4v + 3 of every vessel. */
export function cornerIndex(count: number): Uint32Array {
  const index = new Uint32Array(6 * count);
  for (let v = 0; v < count; v++) {
    const at = 6 * v;
    const corner = 4 * v;
    index[at] = corner;
    index[at + 1] = corner + 1;
    index[at + 2] = corner + 2;
    index[at + 3] = corner + 2;
    index[at + 4] = corner + 1;
    index[at + 5] = corner + 3;
  }
  return index;
}

/** Uploads a scene. The scene's arrays stay the textures' memory: write them, then `resend`. */
export function buildTubes(scene: Scene, colours: TubeColours): Tubes {
  const texture = (
    data: Float32Array | Uint8Array,
    width: number,
    height: number,
    format: three.PixelFormat,
    type: three.TextureDataType,
  ) => {
    const map = new three.DataTexture(data as Float32Array<ArrayBuffer>, width, height, format, type);
    map.needsUpdate = true;
    return map;
  };
  const ends = texture(scene.ends, 2 * ROW_VESSELS, scene.rows, three.RGBAFormat, three.FloatType);
  const values = texture(scene.values, ROW_VESSELS, scene.rows, three.RGFormat, three.FloatType);
  const marks = texture(scene.marks, ROW_VESSELS, scene.rows, three.RGIntegerFormat, three.UnsignedByteType);
  marks.internalFormat = 'RG8UI';
  const palette = texture(new Uint8Array(4 * 256), 256, 1, three.RGBAFormat, three.UnsignedByteType);
  palette.magFilter = three.LinearFilter;
  palette.minFilter = three.LinearFilter;
  const maps = { ends, values, marks };

  const uniforms = startUniforms(scene, { endsMap: ends, valuesMap: values, marksMap: marks, palette });
  uniforms.paper.value.set(...colours.paper);
  uniforms.ink.value.set(...colours.ink);
  uniforms.accent.value.set(...colours.accent);
  const material = new three.RawShaderMaterial({
    glslVersion: three.GLSL3,
    vertexShader: TUBE_VERTEX,
    fragmentShader: TUBE_FRAGMENT,
    uniforms,
    side: three.DoubleSide,
  });
  const geometry = new three.BufferGeometry();
  geometry.setIndex(new three.BufferAttribute(cornerIndex(scene.count), 1));
  geometry.boundingSphere = new three.Sphere(new three.Vector3(), 2);
  const mesh = new three.Mesh(geometry, material);
  mesh.frustumCulled = false;
  return {
    mesh,
    uniforms,
    resend(what) {
      maps[what].needsUpdate = true;
    },
    setPalette(chosen) {
      (palette.image.data as Uint8Array).set(paletteBytes(chosen, 256));
      palette.needsUpdate = true;
    },
    dispose() {
      for (const map of [ends, values, marks, palette]) map.dispose();
      geometry.dispose();
      material.dispose();
    },
  };
}
