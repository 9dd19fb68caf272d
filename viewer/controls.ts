import { PALETTES } from './colours.ts';
import { type Extent, extentOf, MICROMETRES, QUANTITIES, type Quantity, quantityOf, type Shown } from './quantities.ts';
import { grouped, readable } from './readable.ts';
import { mendScale, type Scale } from './scale.ts';
import type { Hiding, Scene } from './scene.ts';
import type { Axis, Section } from './section.ts';

/** Element of an id that is known to be there. */
export function find<T extends HTMLElement>(id: string): T {
  const found = document.getElementById(id);
  if (found === null) throw new Error(`no element #${id} in the page`);
  return found as T;
}

/** All that the form says, in SI. */
export interface Choice {
  readonly quantity: Quantity;
  readonly scale: Scale;
  readonly paletteId: string;
  readonly hiding: Hiding;
  readonly section: Section;
  readonly perspective: boolean;
  readonly ghost: boolean;
  readonly taper: boolean;
}

/** As an input shows it. */
const rounded = (value: number) => String(Number(value.toPrecision(4)));

const input = (id: string) => find<HTMLInputElement>(id);
const select = (id: string) => find<HTMLSelectElement>(id);

/** The form beside the drawing: reads and writes native inputs, knows nothing of WebGL. */
export class Controls {
  #scene: Scene | null = null;
  #extent: Extent = { least: 0, largest: 1, leastPositive: 1 };
  #shown: Shown = MICROMETRES;
  #changed: () => void;

  /** @param changed called after any input changed */
  constructor(changed: () => void) {
    this.#changed = changed;
    select('palette').replaceChildren(...PALETTES.map(({ id, label }) => new Option(label, id)));
    for (const id of ['palette', 'section', 'section-axis', 'section-flip', 'perspective', 'ghost', 'taper', 'log']) {
      input(id).addEventListener('change', () => this.#update());
    }
    for (const id of ['thinnest', 'lowest-order', 'section-offset']) {
      input(id).addEventListener('input', () => this.#update());
    }
    for (const id of ['low', 'high']) input(id).addEventListener('change', () => this.#update());
    select('quantity').addEventListener('change', () => {
      this.#startQuantity();
      this.#update();
    });
    find('full-range').addEventListener('click', () => {
      this.#fillRange();
      this.#update();
    });
  }

  get shown(): Shown {
    return this.#shown;
  }

  get extent(): Extent {
    return this.#extent;
  }

  /** Fits the inputs to a new scene; choices that still make sense stay. */
  start(scene: Scene): void {
    this.#scene = scene;
    const before = select('quantity').value;
    const options = QUANTITIES.map(({ id, label, values }) => {
      const option = new Option(label, id);
      option.disabled = values(scene.record) === null;
      return option;
    });
    select('quantity').replaceChildren(...options);
    const first = options.find(({ value, disabled }) => value === (before || 'pressure') && !disabled);
    select('quantity').value = first?.value ?? 'radius';
    input('thinnest').value = '0';
    input('lowest-order').max = String(scene.highestOrder);
    input('lowest-order').value = '1';
    input('section').checked = false;
    input('section-offset').value = '500';
    find<HTMLFieldSetElement>('tools').disabled = false;
    this.#startQuantity();
    this.#writeTexts();
  }

  read(): Choice {
    const scene = this.#scene!;
    const axis = Number(select('section-axis').value) as Axis;
    return {
      quantity: quantityOf(select('quantity').value),
      scale: this.#readScale(),
      paletteId: select('palette').value,
      hiding: { thinnest: this.#thinnest(scene), lowestOrder: Number(input('lowest-order').value) },
      section: { on: input('section').checked, axis, offset: this.#offset(scene), flip: input('section-flip').checked },
      perspective: input('perspective').checked,
      ghost: input('ghost').checked,
      taper: input('taper').checked,
    };
  }

  #startQuantity(): void {
    const scene = this.#scene;
    if (scene === null) return;
    const quantity = quantityOf(select('quantity').value);
    this.#extent = extentOf(quantity.values(scene.record)!);
    this.#shown = quantity.shown(this.#extent.largest);
    input('log').checked = quantity.log && this.#extent.leastPositive < this.#extent.largest;
    input('log').disabled = quantity.counted || !(this.#extent.largest > 0);
    this.#fillRange();
    find('range-unit').textContent = this.#shown.unit;
  }

  #fillRange(): void {
    const { least, largest } = this.#extent;
    input('low').value = rounded(this.#shown.from(least));
    input('high').value = rounded(this.#shown.from(largest));
  }

  #readScale(): Scale {
    const { least, largest, leastPositive } = this.#extent;
    const end = (id: string, whole: number) => {
      const text = input(id).value;
      const value = this.#shown.to(Number(text));
      // A whole end was rounded for reading: take the exact one back, so that nothing counts as beyond it.
      const untouched = text === rounded(this.#shown.from(whole));
      return text === '' || !Number.isFinite(value) || untouched ? whole : value;
    };
    return mendScale(end('low', least), end('high', largest), input('log').checked, leastPositive);
  }

  /** m; the slider runs evenly over the logarithm of the radius, and hides nothing at its start. */
  #thinnest(scene: Scene): number {
    const part = Number(input('thinnest').value) / 1000;
    if (part === 0) return 0;
    return scene.leastRadius * Math.exp(part * Math.log(scene.largestRadius / scene.leastRadius));
  }

  /** m along the section's axis, over the whole scene. */
  #offset(scene: Scene): number {
    const axis = Number(select('section-axis').value);
    const part = Number(input('section-offset').value) / 1000;
    return scene.low[axis]! + part * (scene.high[axis]! - scene.low[axis]!);
  }

  #writeTexts(): void {
    const { hiding, section } = this.read();
    find('thinnest-text').textContent =
      hiding.thinnest === 0 ? 'none' : `${readable(MICROMETRES.from(hiding.thinnest))} µm`;
    find('order-text').textContent = hiding.lowestOrder <= 1 ? 'none' : grouped(hiding.lowestOrder);
    find('section-text').textContent = `${'xyz'[section.axis]} = ${readable(section.offset * 1e3)} mm`;
    for (const id of ['section-axis', 'section-flip', 'section-offset']) input(id).disabled = !section.on;
  }

  #update(): void {
    if (this.#scene === null) return;
    this.#writeTexts();
    this.#changed();
  }
}
