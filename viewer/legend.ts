import { colourAt, cssOf, type Palette } from './colours.ts';
import type { TreeRecord } from './library.ts';
import type { Quantity, Shown } from './quantities.ts';
import { grouped, readable } from './readable.ts';
import { placeOf, type Scale, ticksOf } from './scale.ts';

/** What the legend says, apart from how it is drawn. */
export interface Legend {
  readonly title: string;
  readonly palette: Palette;
  /** Places 0 (low end) to 1 on the bar; none where there are swatches. */
  readonly ticks: readonly { readonly place: number; readonly label: string }[];
  /** Data lie below the low end, above the high end. */
  readonly below: boolean;
  readonly above: boolean;
  /** One a whole number, rising. */
  readonly swatches: readonly { readonly place: number; readonly label: string; readonly drain: boolean }[];
  /** Whether ringed tubes need explaining. */
  readonly rings: boolean;
}

const MOST_SWATCHES = 14;

/**
 * @param scale  in SI
 * @param extent of the data, in SI
 */
export function describeLegend(
  record: TreeRecord,
  quantity: Quantity,
  scale: Scale,
  shown: Shown,
  palette: Palette,
  extent: { readonly least: number; readonly largest: number },
): Legend {
  const title = shown.unit === '' ? quantity.label : `${quantity.label} (${shown.unit})`;
  const rings = record.kinds.includes('drain');
  const common = { title, palette, rings };
  const first = Math.max(extent.least, Math.ceil(scale.low - 1e-9));
  const last = Math.min(extent.largest, Math.floor(scale.high + 1e-9));
  if (quantity.counted && last - first < MOST_SWATCHES) {
    const swatches = [];
    for (let i = first; i <= last; i++) {
      const label = quantity.id === 'tree' ? (record.names[i] ?? String(i)) : grouped(i);
      const drain = quantity.id === 'tree' && record.kinds[i] === 'drain';
      swatches.push({ place: placeOf(scale, i), label, drain });
    }
    return { ...common, ticks: [], below: false, above: false, swatches };
  }
  const inUnits = { low: shown.from(scale.low), high: shown.from(scale.high), log: scale.log };
  const ticks = ticksOf(inUnits, 6).map((tick) => ({ place: placeOf(inUnits, tick), label: readable(tick) }));
  const slack = 1e-9 * Math.abs(scale.high);
  return {
    ...common,
    ticks,
    below: extent.least < scale.low - slack,
    above: extent.largest > scale.high + slack,
    swatches: [],
  };
}

const TITLE_FONT = '600 13px system-ui, sans-serif';
const TEXT_FONT = '12px system-ui, sans-serif';
const BAR = { width: 14, height: 190 };

/** Height in CSS pixels that drawLegend will use. */
export function legendHeight(legend: Legend): number {
  const body = legend.swatches.length > 0 ? 20 * legend.swatches.length : BAR.height + 16;
  return 26 + body + (legend.rings ? 44 : 0);
}

/** Width in CSS pixels that drawLegend will use. */
export function legendWidth(pen: CanvasRenderingContext2D, legend: Legend): number {
  pen.font = TITLE_FONT;
  let widest = pen.measureText(legend.title).width;
  pen.font = TEXT_FONT;
  for (const { label } of legend.ticks) widest = Math.max(widest, BAR.width + 9 + pen.measureText(label).width);
  for (const { label } of legend.swatches) widest = Math.max(widest, 34 + pen.measureText(label).width);
  return widest;
}

/** Draws with its top left corner at x, y. */
export function drawLegend(pen: CanvasRenderingContext2D, legend: Legend, x: number, y: number, ink: string): void {
  pen.fillStyle = ink;
  pen.strokeStyle = ink;
  pen.lineWidth = 1;
  pen.textBaseline = 'middle';
  pen.textAlign = 'left';
  pen.font = TITLE_FONT;
  pen.fillText(legend.title, x, y + 8);
  pen.font = TEXT_FONT;
  let at = y + 26;
  if (legend.swatches.length > 0) {
    for (const swatch of [...legend.swatches].reverse()) {
      pen.fillStyle = cssOf(colourAt(legend.palette, swatch.place));
      drawTube(pen, x, at + 2, 26, 12, swatch.drain);
      pen.fillStyle = ink;
      pen.fillText(swatch.label, x + 34, at + 8);
      at += 20;
    }
  } else {
    at += 8;
    for (let i = 0; i < BAR.height; i++) {
      pen.fillStyle = cssOf(colourAt(legend.palette, 1 - (i + 0.5) / BAR.height));
      pen.fillRect(x, at + i, BAR.width, 1.5);
    }
    pen.strokeRect(x - 0.5, at - 0.5, BAR.width + 1, BAR.height + 1);
    if (legend.above) drawBeyond(pen, x, at, -7, cssOf(colourAt(legend.palette, 1)));
    if (legend.below) drawBeyond(pen, x, at + BAR.height, 7, cssOf(colourAt(legend.palette, 0)));
    pen.fillStyle = ink;
    for (const tick of legend.ticks) {
      const level = Math.round(at + (1 - tick.place) * BAR.height) + 0.5;
      pen.beginPath();
      pen.moveTo(x + BAR.width, level);
      pen.lineTo(x + BAR.width + 5, level);
      pen.stroke();
      pen.fillText(tick.label, x + BAR.width + 9, level);
    }
    at += BAR.height + 8;
  }
  if (legend.rings) {
    at += 8;
    for (const [label, drain] of [
      ['supply', false],
      ['drain', true],
    ] as const) {
      pen.fillStyle = cssOf(colourAt(legend.palette, 0.75));
      drawTube(pen, x, at, 26, 10, drain);
      pen.fillStyle = ink;
      pen.fillText(label, x + 34, at + 5);
      at += 18;
    }
  }
}

/** A pointed end: there are values past this end of the scale. */
function drawBeyond(pen: CanvasRenderingContext2D, x: number, y: number, height: number, fill: string): void {
  pen.fillStyle = fill;
  pen.beginPath();
  pen.moveTo(x - 0.5, y);
  pen.lineTo(x + BAR.width / 2, y + height);
  pen.lineTo(x + BAR.width + 0.5, y);
  pen.closePath();
  pen.fill();
  pen.stroke();
}

function drawTube(
  pen: CanvasRenderingContext2D,
  x: number,
  y: number,
  width: number,
  height: number,
  drain: boolean,
): void {
  pen.fillRect(x, y, width, height);
  if (drain) {
    const ink = pen.strokeStyle;
    pen.fillStyle = ink;
    for (let i = 2; i < width; i += 7) pen.fillRect(x + i, y, 3, height);
  }
  pen.strokeRect(x - 0.5, y - 0.5, width + 1, height + 1);
}
