import { type Camera, placeInPicture, rayThrough } from './camera.ts';
import { type Colour, cssOf, paletteOf } from './colours.ts';
import { type Choice, Controls, find } from './controls.ts';
import { outlineTissue, piecesNear } from './ghost.ts';
import { bindInput } from './input.ts';
import { describeLegend, type Legend } from './legend.ts';
import { decodeTree, type TreeRecord } from './library.ts';
import { drawOverlay } from './overlay.ts';
import { pickVessel } from './picking.ts';
import { grouped } from './readable.ts';
import { countShown, drawnRadius, fillValues, MARK, markWay, packScene, type Scene, setTaper } from './scene.ts';
import { planeOf } from './section.ts';
import { filesOfDrop, filesOfInput, type Source, sourcesOfFiles, sourcesOfPage } from './sources.ts';
import { Stage } from './stage.ts';
import { fillPanel } from './vessel-panel.ts';
import { wayToRoot } from './way.ts';

const PAPER: Colour = [0.965, 0.961, 0.945];
const SHEET: Colour = [0.992, 0.988, 0.98];
const INK: Colour = [0.09, 0.145, 0.176];
const ACCENT: Colour = [0.78, 0.16, 0.12];

/** What scripts and tests may read. */
export interface ViewerState {
  readonly phase: 'empty' | 'loading' | 'ready' | 'error';
  /** What the message over the drawing says; '' for none. */
  readonly message: string;
  /** Name of the shown result. */
  readonly result: string;
  readonly trees: number;
  readonly vessels: number;
  /** Vessels that pass the hiding limits. */
  readonly shown: number;
  readonly quantity: string;
  /** Colour scale, in SI. */
  readonly low: number;
  readonly high: number;
  readonly log: boolean;
  /** Number of the chosen vessel, −1 for none, and the vessels of its way to the root, itself first. */
  readonly selected: number;
  readonly way: readonly number[];
  /** The drawing has come to rest: nothing will change until something is done. */
  readonly settled: boolean;
  readonly frames: number;
}

export interface PictureOptions {
  /** Legend, length bar and directions are drawn too; true where not given. */
  readonly legend?: boolean;
}

/** Strings together the drawing, the form, the files and the panel. */
export class Application {
  #stage: Stage | null = null;
  #controls: Controls;
  #sources: Source[] = [];
  #scene: Scene | null = null;
  #choice: Choice | null = null;
  #legend: Legend | null = null;
  #phase: ViewerState['phase'] = 'empty';
  #message = '';
  #shown = 0;
  #selected = -1;
  #way: number[] = [];
  #drawing = find<HTMLCanvasElement>('drawing');
  #overlay = find<HTMLCanvasElement>('overlay');
  #result = find<HTMLSelectElement>('result');

  constructor() {
    this.#controls = new Controls(() => this.#apply());
    try {
      this.#stage = new Stage({
        canvas: this.#drawing,
        colours: { paper: PAPER, ink: INK, accent: ACCENT },
        onFrame: () => this.#drawOverlay(),
      });
    } catch (error) {
      this.#fail(`The drawing needs WebGL 2, which this browser does not give (${textOf(error)}).`);
      return;
    }
    this.#bind();
  }

  state(): ViewerState {
    const scale = this.#choice?.scale;
    return {
      phase: this.#phase,
      message: this.#message,
      result: this.#result.selectedOptions[0]?.textContent ?? '',
      trees: this.#scene?.record.names.length ?? 0,
      vessels: this.#scene?.count ?? 0,
      shown: this.#shown,
      quantity: this.#choice?.quantity.id ?? '',
      low: scale?.low ?? 0,
      high: scale?.high ?? 0,
      log: scale?.log ?? false,
      selected: this.#selected,
      way: this.#way,
      settled: this.#stage?.settled ?? true,
      frames: this.#stage?.frames ?? 0,
    };
  }

  /** The drawing, with its legend unless that is left out, as PNG; always in the fine form. */
  async picture(options: PictureOptions = {}): Promise<Blob> {
    const stage = this.#stage;
    if (stage === null) throw new Error('there is no drawing');
    const canvas = document.createElement('canvas');
    canvas.width = this.#drawing.width;
    canvas.height = this.#drawing.height;
    const pen = canvas.getContext('2d')!;
    stage.drawFine();
    pen.drawImage(this.#drawing, 0, 0);
    if (options.legend !== false) this.#paintOverlay(pen, stage);
    return new Promise((done, fail) => {
      canvas.toBlob(
        (blob) => (blob === null ? fail(new Error('the browser made no picture')) : done(blob)),
        'image/png',
      );
    });
  }

  /** Place of the middle of a vessel, in CSS pixels of the page. */
  screenOf(vessel: number): { x: number; y: number } {
    const { ends } = this.#scene!;
    const middle = [0, 1, 2].map((k) => 0.5 * (ends[8 * vessel + k]! + ends[8 * vessel + 4 + k]!));
    const stage = this.#stage!;
    const place = placeInPicture(stage.camera, stage.aspect, middle as [number, number, number]);
    const box = this.#drawing.getBoundingClientRect();
    return { x: box.left + box.width * (0.5 + 0.5 * place.x), y: box.top + box.height * (0.5 - 0.5 * place.y) };
  }

  /** Opens what the page's address or its server names. */
  async openPage(page: URL): Promise<void> {
    if (this.#stage === null) return;
    try {
      const sources = await sourcesOfPage(page);
      if (sources.length > 0) await this.#offer(sources);
    } catch (error) {
      this.#fail(textOf(error));
    }
  }

  #bind(): void {
    bindInput(this.#drawing, {
      camera: () => this.#stage!.camera,
      home: () => this.#stage!.home(),
      move: (camera) => this.#move(camera),
      pick: (x, y) => this.#pick(x, y),
      deselect: () => this.#select(-1),
    });
    const chooser = find<HTMLInputElement>('files');
    find('open').addEventListener('click', () => chooser.click());
    chooser.addEventListener('change', () => {
      if (chooser.files !== null) void this.#offer(sourcesOfFiles(filesOfInput(chooser.files)));
      chooser.value = '';
    });
    this.#result.addEventListener('change', () => void this.#open(this.#sources[Number(this.#result.value)]!));
    find('home').addEventListener('click', () => this.#move(this.#stage!.home()));
    find('save').addEventListener('click', () => void this.#save());
    find('find').addEventListener('submit', (event) => {
      event.preventDefault();
      const vessel = find<HTMLInputElement>('find-vessel').valueAsNumber;
      if (this.#scene !== null && vessel >= 0 && vessel < this.#scene.count) this.#select(Math.floor(vessel));
    });
    const view = find('view');
    document.addEventListener('dragover', (event) => {
      event.preventDefault();
      view.classList.add('over');
    });
    document.addEventListener('dragleave', (event) => {
      if (event.relatedTarget === null) view.classList.remove('over');
    });
    document.addEventListener('drop', (event) => {
      event.preventDefault();
      view.classList.remove('over');
      if (event.dataTransfer === null) return;
      filesOfDrop(event.dataTransfer).then(
        (found) => this.#offer(sourcesOfFiles(found)),
        (error) => this.#fail(textOf(error)),
      );
    });
    const resize = () => {
      const ratio = Math.min(2, window.devicePixelRatio);
      this.#stage!.resize(view.clientWidth, view.clientHeight, ratio);
      this.#overlay.width = Math.round(view.clientWidth * ratio);
      this.#overlay.height = Math.round(view.clientHeight * ratio);
    };
    new ResizeObserver(resize).observe(view);
    resize();
  }

  /** Lists tree files and opens the first. */
  async #offer(sources: Source[]): Promise<void> {
    if (sources.length === 0) {
      this.#fail('Got no tree file, expected a run with its tree.vtp, or one of .vtp, .vtu, .json, .swc.');
      return;
    }
    this.#sources = sources;
    this.#result.replaceChildren(...sources.map(({ name }, i) => new Option(name, String(i))));
    this.#result.disabled = sources.length < 2;
    await this.#open(sources[0]!);
  }

  async #open(source: Source): Promise<void> {
    this.#phase = 'loading';
    this.#say(`Reading ${source.name} …`, true);
    await painted();
    try {
      const record = decodeTree(source.file, await source.read());
      this.#start(record);
    } catch (error) {
      this.#clear();
      this.#fail(`${source.name} cannot be read.\n${textOf(error)}`);
    }
  }

  #clear(): void {
    this.#scene = null;
    this.#choice = null;
    this.#legend = null;
    this.#selected = -1;
    this.#way = [];
    this.#shown = 0;
    find('vessel').hidden = true;
    find('summary').textContent = '';
    find<HTMLFieldSetElement>('tools').disabled = true;
    this.#stage?.show(null, new Float32Array(0));
  }

  #start(record: TreeRecord): void {
    const stage = this.#stage!;
    this.#clear();
    const scene = packScene(record);
    if (scene.count === 0) throw new Error('got no vessels, expected at least one');
    if (scene.rows > stage.mostRows) {
      throw new Error(`got ${grouped(scene.count)} vessels, more than this device's textures hold`);
    }
    this.#scene = scene;
    const outline = outlineTissue(record.provenance);
    const ghostPoints = outline.combined ? piecesNear(outline.points, scene.low, scene.high) : outline.points;
    stage.show(
      scene,
      Float32Array.from(ghostPoints, (x, i) => (x - scene.centre[i % 3]!) * scene.scale),
    );
    const ghost = find<HTMLInputElement>('ghost');
    ghost.disabled = ghostPoints.length === 0;
    ghost.title = outline.left.length > 0 ? `No outline for: ${outline.left.join(', ')}` : '';
    find('find-vessel').setAttribute('max', String(scene.count - 1));
    const trees = record.names.map((name, t) => (name === record.kinds[t] ? name : `${name} (${record.kinds[t]})`));
    find('summary').textContent = `${grouped(scene.count)} vessels · ${trees.join(', ')}`;
    find('empty').hidden = true;
    this.#say('', false);
    this.#phase = 'ready';
    this.#controls.start(scene);
    this.#apply();
    this.#move(stage.home());
  }

  /** Brings the drawing in line with the form. */
  #apply(): void {
    const scene = this.#scene;
    const stage = this.#stage;
    const tubes = stage?.tubes;
    if (scene === null || !stage || !tubes) return;
    const before = this.#choice;
    const choice = this.#controls.read();
    this.#choice = choice;
    const { extent, shown } = this.#controls;
    // The card gets values near 1, whatever the quantity's SI size.
    const unit = Math.max(Math.abs(extent.least), Math.abs(extent.largest)) || 1;
    if (before?.quantity !== choice.quantity) {
      fillValues(scene, choice.quantity, choice.quantity.values(scene.record)!, unit);
      tubes.resend('values');
    }
    if (before === null || before.taper !== choice.taper) {
      setTaper(scene, choice.taper);
      tubes.resend('ends');
    }
    tubes.uniforms.range.value.set(choice.scale.low / unit, choice.scale.high / unit);
    tubes.uniforms.logScale.value = choice.scale.log;
    tubes.uniforms.plane.value.set(...planeOf(scene, choice.section));
    const palette = paletteOf(choice.paletteId);
    if (before?.paletteId !== choice.paletteId) stage.setPalette(palette);
    stage.setHiding(scene, choice.hiding);
    stage.ghostVisible = choice.ghost;
    if (stage.camera.perspective !== choice.perspective) {
      stage.camera = { ...stage.camera, perspective: choice.perspective };
    }
    this.#shown = countShown(scene, choice.hiding);
    this.#legend = describeLegend(scene.record, choice.quantity, choice.scale, shown, palette, extent);
    const from = `${this.#legend.title}${choice.scale.log ? ', log scale' : ''}`;
    this.#overlay.setAttribute(
      'aria-label',
      `Legend: ${from}, ${shown.from(choice.scale.low)} to ${shown.from(choice.scale.high)}`,
    );
    stage.invalidate();
  }

  #move(camera: Camera): void {
    this.#stage!.camera = camera;
    this.#stage!.invalidate();
  }

  #pick(x: number, y: number): void {
    const { canvas, camera, aspect } = this.#stage!;
    const scene = this.#scene;
    if (scene === null || this.#choice === null) return;
    const ray = rayThrough(camera, aspect, (2 * x) / canvas.clientWidth - 1, 1 - (2 * y) / canvas.clientHeight);
    const hit = pickVessel(scene.ends, scene.marks, scene.count, ray, {
      thinnest: drawnRadius(scene, this.#choice.hiding),
      lowestOrder: this.#choice.hiding.lowestOrder,
      plane: planeOf(scene, this.#choice.section),
      ...this.#stage!.widening(),
      inFront: MARK.way,
    });
    this.#select(hit === null ? -1 : hit.vessel);
  }

  #select(vessel: number): void {
    const scene = this.#scene;
    const tubes = this.#stage?.tubes;
    if (scene === null || !tubes) return;
    const panel = find('vessel');
    this.#selected = vessel;
    this.#way = [];
    if (vessel < 0) panel.hidden = true;
    else {
      const row = scene.rowOf[vessel]!;
      const way = wayToRoot(scene.record, row);
      this.#way = way.rows.slice(0, -1).map((at) => scene.vesselOf[at]!);
      fillPanel(
        panel,
        scene.record,
        row,
        way,
        () => this.#select(-1),
        () => this.#lookAt(vessel),
      );
    }
    markWay(scene, vessel, this.#way);
    tubes.resend('marks');
    tubes.uniforms.hasWay.value = vessel >= 0;
    this.#stage!.invalidate();
  }

  #lookAt(vessel: number): void {
    const { ends } = this.#scene!;
    const at = 8 * vessel;
    const middle = [0, 1, 2].map((k) => 0.5 * (ends[at + k]! + ends[at + 4 + k]!)) as [number, number, number];
    const length = Math.hypot(...[0, 1, 2].map((k) => ends[at + 4 + k]! - ends[at + k]!));
    this.#move({ ...this.#stage!.camera, target: middle, distance: 6 * (length + 2 * ends[at + 7]!) });
  }

  async #save(): Promise<void> {
    const link = document.createElement('a');
    link.href = URL.createObjectURL(await this.picture());
    const name = this.state()
      .result.replace(/[^\w.-]+/g, '_')
      .replace(/\.\w+$/, '');
    link.download = `${name || 'vessels'}.png`;
    link.click();
    setTimeout(() => URL.revokeObjectURL(link.href), 10_000);
  }

  #drawOverlay(): void {
    const pen = this.#overlay.getContext('2d')!;
    pen.clearRect(0, 0, this.#overlay.width, this.#overlay.height);
    this.#paintOverlay(pen, this.#stage!);
  }

  #paintOverlay(pen: CanvasRenderingContext2D, stage: Stage): void {
    if (this.#scene === null) return;
    pen.setTransform(stage.ratio, 0, 0, stage.ratio, 0, 0);
    drawOverlay(pen, this.#drawing.clientWidth, this.#drawing.clientHeight, {
      legend: this.#legend,
      camera: stage.camera,
      metres: 1 / this.#scene.scale,
      ink: cssOf(INK),
      sheet: cssOf(SHEET),
    });
    pen.setTransform(1, 0, 0, 1, 0, 0);
  }

  #say(text: string, busy: boolean): void {
    const box = find('message');
    this.#message = text;
    box.textContent = text;
    box.hidden = text === '';
    box.classList.toggle('busy', busy);
  }

  #fail(text: string): void {
    this.#phase = 'error';
    this.#say(text, false);
  }
}

function textOf(error: unknown): string {
  return error instanceof Error ? error.message : String(error);
}

/** Resolves when the page has had a chance to show what was just written. */
function painted(): Promise<void> {
  return new Promise((done) => requestAnimationFrame(() => setTimeout(done)));
}

declare global {
  interface Window {
    vesselwrightViewer: {
      state(): ViewerState;
      picture(options?: PictureOptions): Promise<Blob>;
      screenOf(vessel: number): { x: number; y: number };
    };
  }
}
