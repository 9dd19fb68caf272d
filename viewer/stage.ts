import * as three from 'three';
import { type Camera, fitted, frameOf, homeCamera, OPENING } from './camera.ts';
import type { Palette } from './colours.ts';
import { drawnRadius, type Hiding, type Scene } from './scene.ts';
import { buildTubes, LEAST_PIXELS, type TubeColours, type Tubes } from './tubes.ts';

const EMPTY_REACH = 1.1;
/** A finer picture is drawn this long after the last change, in ms. */
const REST = 160;
/** … unless the plain one was still not done so much later, in ms (a software renderer and very many vessels). */
const PATIENCE = 250;

export interface StageOptions {
  readonly canvas: HTMLCanvasElement;
  readonly colours: TubeColours;
  /** Called after each frame. */
  readonly onFrame: () => void;
}

/**
 * The WebGL side: draws one scene with one camera whenever `invalidate` is called, at once in a plain picture and at
 * rest in one of four samples a pixel.
 */
export class Stage {
  readonly canvas: HTMLCanvasElement;
  camera: Camera = homeCamera(true);
  settled = true;
  frames = 0;
  #colours: TubeColours;
  #renderer: three.WebGLRenderer;
  #world = new three.Scene();
  #perspective = new three.PerspectiveCamera();
  #parallel = new three.OrthographicCamera();
  #tubes: Tubes | null = null;
  #scene: Scene | null = null;
  #ghost: three.LineSegments | null = null;
  #reach = EMPTY_REACH;
  #wanted = 0;
  #rest: ReturnType<typeof setTimeout> | undefined;
  #fine: three.WebGLRenderTarget | null = null;
  #shrink: three.Mesh<three.PlaneGeometry, three.RawShaderMaterial>;
  #onFrame: () => void;

  /** @throws Error where the browser gives no WebGL 2 */
  constructor(options: StageOptions) {
    this.canvas = options.canvas;
    this.#colours = options.colours;
    this.#onFrame = options.onFrame;
    this.#renderer = new three.WebGLRenderer({ canvas: options.canvas, antialias: false, alpha: false });
    // Colours are screen colours from end to end: what the legend shows is what the shader writes.
    this.#renderer.outputColorSpace = three.LinearSRGBColorSpace;
    this.#renderer.setClearColor(new three.Color().setRGB(...options.colours.paper), 1);
    this.#shrink = new three.Mesh(
      new three.PlaneGeometry(2, 2),
      new three.RawShaderMaterial({
        glslVersion: three.GLSL3,
        depthTest: false,
        uniforms: { picture: { value: null } },
        vertexShader: `in vec3 position; out vec2 place;
          void main() { place = 0.5 + 0.5 * position.xy; gl_Position = vec4(position.xy, 0.0, 1.0); }`,
        fragmentShader: `precision highp float; uniform sampler2D picture; in vec2 place; out vec4 colour;
          void main() { colour = vec4(texture(picture, place).rgb, 1.0); }`,
      }),
    );
    this.#shrink.frustumCulled = false;
  }

  get tubes(): Tubes | null {
    return this.#tubes;
  }

  /** Texture rows that the device takes, which bounds the vessels in one scene. */
  get mostRows(): number {
    return this.#renderer.capabilities.maxTextureSize;
  }

  get aspect(): number {
    return this.canvas.clientWidth / Math.max(1, this.canvas.clientHeight);
  }

  /** Pixels of the drawing on one CSS pixel. */
  get ratio(): number {
    return this.#renderer.getPixelRatio();
  }

  /** Replaces what is shown. */
  show(scene: Scene | null, ghost: Float32Array): void {
    if (this.#tubes !== null) {
      this.#world.remove(this.#tubes.mesh);
      this.#tubes.dispose();
      this.#tubes = null;
    }
    if (this.#ghost !== null) {
      this.#world.remove(this.#ghost);
      this.#ghost.geometry.dispose();
      this.#ghost = null;
    }
    this.#reach = EMPTY_REACH;
    this.#scene = scene;
    if (scene !== null) {
      this.#tubes = buildTubes(scene, this.#colours);
      this.#world.add(this.#tubes.mesh);
    }
    if (ghost.length > 0) {
      const geometry = new three.BufferGeometry();
      geometry.setAttribute('position', new three.BufferAttribute(ghost, 3));
      const color = new three.Color().setRGB(...this.#colours.ink);
      const material = new three.LineBasicMaterial({ color, transparent: true, opacity: 0.3 });
      this.#ghost = new three.LineSegments(geometry, material);
      this.#ghost.frustumCulled = false;
      this.#world.add(this.#ghost);
      for (let i = 0; i < ghost.length; i += 3) {
        this.#reach = Math.max(this.#reach, 1.01 * Math.hypot(ghost[i]!, ghost[i + 1]!, ghost[i + 2]!));
      }
    }
    this.invalidate();
  }

  /** The view of all that is shown. */
  home(): Camera {
    const start = homeCamera(this.camera.perspective);
    const lists = [];
    // Vessels lie four numbers apart: both ends, with their radii between.
    if (this.#scene !== null) lists.push({ points: this.#scene.ends.subarray(0, 8 * this.#scene.count), stride: 4 });
    if (this.#ghost?.visible) lists.push({ points: this.#ghost.geometry.getAttribute('position').array, stride: 3 });
    return fitted(start, this.aspect, lists);
  }

  set ghostVisible(visible: boolean) {
    if (this.#ghost !== null) this.#ghost.visible = visible;
    this.invalidate();
  }

  setPalette(palette: Palette): void {
    this.#tubes?.setPalette(palette);
    this.invalidate();
  }

  setHiding(scene: Scene, hiding: Hiding): void {
    if (this.#tubes === null) return;
    this.#tubes.uniforms.thinnest.value = drawnRadius(scene, hiding);
    this.#tubes.uniforms.lowestOrder.value = hiding.lowestOrder;
    this.invalidate();
  }

  /** Half the least drawn width of a vessel, as picking needs it. */
  widening(): { widen: number; widenByDistance: number } {
    const half = 0.5 * LEAST_PIXELS * this.#pixel(this.canvas.clientHeight);
    return this.camera.perspective ? { widen: 0, widenByDistance: half } : { widen: half, widenByDistance: 0 };
  }

  resize(width: number, height: number, ratio: number): void {
    this.#renderer.setPixelRatio(ratio);
    this.#renderer.setSize(width, height, false);
    this.#fine?.dispose();
    this.#fine = null;
    this.invalidate();
  }

  /** Asks for a new frame. */
  invalidate(): void {
    this.settled = false;
    if (this.#wanted !== 0) return;
    this.#wanted = requestAnimationFrame(() => {
      this.#wanted = 0;
      this.#draw(null);
      this.#onFrame();
      clearTimeout(this.#rest);
      this.#rest = setTimeout(() => {
        if (this.#wanted !== 0) return;
        if (this.#waitForCard() < PATIENCE) this.drawFine();
        else this.#finish();
      }, REST);
    });
  }

  /** Draws four samples a pixel into the canvas, now; its pixels can be read until the next event. */
  drawFine(): void {
    const size = this.#renderer.getDrawingBufferSize(new three.Vector2());
    if (2 * Math.max(size.x, size.y) > this.mostRows || size.x * size.y > 8e6) {
      this.#draw(null);
    } else {
      this.#fine ??= new three.WebGLRenderTarget(2 * size.x, 2 * size.y, { magFilter: three.LinearFilter });
      this.#draw(this.#fine);
      this.#shrink.material.uniforms.picture!.value = this.#fine.texture;
      this.#renderer.render(this.#shrink, this.#parallel);
    }
    this.#finish();
  }

  /** Waits until all that was drawn is done. Returns ms. */
  #waitForCard(): number {
    const began = performance.now();
    const gl = this.#renderer.getContext();
    gl.readPixels(0, 0, 1, 1, gl.RGBA, gl.UNSIGNED_BYTE, new Uint8Array(4));
    return performance.now() - began;
  }

  #finish(): void {
    this.settled = true;
    this.#onFrame();
  }

  #pixel(pixelsHigh: number): number {
    return (OPENING * (this.camera.perspective ? 1 : this.camera.distance)) / Math.max(1, pixelsHigh);
  }

  #draw(target: three.WebGLRenderTarget | null): void {
    const camera = this.#placeCamera();
    if (this.#tubes !== null) this.#aim(camera, this.#tubes);
    this.#renderer.setRenderTarget(target);
    this.#renderer.clear();
    this.#renderer.render(this.#world, camera);
    this.#renderer.setRenderTarget(null);
    this.frames++;
  }

  #placeCamera(): three.PerspectiveCamera | three.OrthographicCamera {
    const { camera, aspect } = this;
    const { right, up, forward, eye } = frameOf(camera);
    const depth = -(eye[0] * forward[0] + eye[1] * forward[1] + eye[2] * forward[2]);
    const half = 0.5 * OPENING;
    const placed = camera.perspective ? this.#perspective : this.#parallel;
    placed.far = depth + this.#reach;
    // In a parallel view the near plane may lie behind the eye: nothing is ever too near.
    placed.near = camera.perspective ? Math.max(0.02 * camera.distance, depth - this.#reach) : depth - this.#reach;
    placed.far = Math.max(placed.far, placed.near + 0.01);
    if (placed instanceof three.PerspectiveCamera) {
      placed.fov = (360 / Math.PI) * Math.atan(half);
      placed.aspect = aspect;
    } else {
      placed.top = half * camera.distance;
      placed.bottom = -placed.top;
      placed.right = placed.top * aspect;
      placed.left = -placed.right;
    }
    const [r, u, f] = [right, up, forward];
    placed.matrixAutoUpdate = false;
    placed.matrix.set(r[0], u[0], -f[0], eye[0], r[1], u[1], -f[1], eye[1], r[2], u[2], -f[2], eye[2], 0, 0, 0, 1);
    placed.updateMatrixWorld(true);
    placed.updateProjectionMatrix();
    return placed;
  }

  #aim(placed: three.Camera & { near: number }, tubes: Tubes): void {
    const { camera, aspect } = this;
    const frame = frameOf(camera);
    const size = 0.5 * OPENING * (camera.perspective ? 1 : camera.distance);
    const set = tubes.uniforms;
    set.eye.value.set(...frame.eye);
    set.forward.value.set(...frame.forward);
    set.right.value.set(...frame.right);
    set.up.value.set(...frame.up);
    set.rightEdge.value.set(...frame.right).multiplyScalar(size * aspect);
    set.topEdge.value.set(...frame.up).multiplyScalar(size);
    set.perspective.value = camera.perspective;
    // Widths are counted in pixels of the screen, whatever the samples, so that a fine picture shows the same.
    set.pixel.value = this.#pixel(this.canvas.clientHeight);
    set.nearest.value = camera.perspective ? placed.near : -1e20;
    const m = new three.Matrix4().multiplyMatrices(placed.projectionMatrix, placed.matrixWorldInverse).elements;
    set.depthRow.value.set(m[2]!, m[6]!, m[10]!, m[14]!);
    set.clipRow.value.set(m[3]!, m[7]!, m[11]!, m[15]!);
  }
}
