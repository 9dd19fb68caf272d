import { type Camera, frameOf, OPENING } from './camera.ts';
import { drawLegend, type Legend, legendHeight, legendWidth } from './legend.ts';
import { readable } from './readable.ts';

/** Everything drawn over the vessels: legend, length bar, directions. */
export interface Overlay {
  readonly legend: Legend | null;
  readonly camera: Camera;
  /** Metres a scene unit. */
  readonly metres: number;
  readonly ink: string;
  /** Behind the writing, so that it reads over vessels too. */
  readonly sheet: string;
}

/** Draws in CSS pixels on a canvas of this size; the same call serves the screen and the saved picture. */
export function drawOverlay(pen: CanvasRenderingContext2D, width: number, height: number, overlay: Overlay): void {
  const { legend, camera, ink } = overlay;
  if (legend !== null) {
    const tall = legendHeight(legend);
    const wide = legendWidth(pen, legend);
    drawSheet(pen, 10, height - 26 - tall, wide + 18, tall + 16, overlay.sheet);
    drawLegend(pen, legend, 18, height - 18 - tall, ink);
  }
  drawLengthBar(pen, width, height, overlay);
  drawDirections(pen, width - 46, height - 46, camera, ink);
}

function drawSheet(
  pen: CanvasRenderingContext2D,
  x: number,
  y: number,
  width: number,
  height: number,
  sheet: string,
): void {
  pen.globalAlpha = 0.84;
  pen.fillStyle = sheet;
  pen.beginPath();
  pen.roundRect(x, y, width, height, 5);
  pen.fill();
  pen.globalAlpha = 1;
}

/** Longest length of 1, 2 or 5 times a power of ten that is at most `most` metres, and how it is written. */
export function barLength(most: number): { readonly length: number; readonly label: string } {
  const decade = 10 ** Math.floor(Math.log10(most) + 1e-9);
  const part = [5, 2, 1].find((step) => step * decade <= most * (1 + 1e-9)) ?? 1;
  const length = part * decade;
  if (length >= 0.99e-2) return { length, label: `${readable(length * 100, 1)} cm` };
  if (length >= 0.99e-3) return { length, label: `${readable(length * 1e3, 1)} mm` };
  return { length, label: `${readable(length * 1e6, 1)} µm` };
}

function drawLengthBar(pen: CanvasRenderingContext2D, width: number, height: number, overlay: Overlay): void {
  const metresPerPixel = (OPENING * overlay.camera.distance * overlay.metres) / height;
  const { length, label } = barLength(150 * metresPerPixel);
  const size = length / metresPerPixel;
  // In perspective a length holds at one depth only.
  const text = overlay.camera.perspective ? `${label} at the centre` : label;
  pen.font = '12px system-ui, sans-serif';
  const wide = Math.max(size, pen.measureText(text).width);
  const right = width - 100 - (wide - size) / 2;
  const y = height - 26.5;
  drawSheet(pen, width - 108 - wide, height - 90, wide + 98, 80, overlay.sheet);
  pen.strokeStyle = overlay.ink;
  pen.fillStyle = overlay.ink;
  pen.lineWidth = 1.5;
  pen.beginPath();
  pen.moveTo(right - size, y - 4);
  pen.lineTo(right - size, y);
  pen.lineTo(right, y);
  pen.lineTo(right, y - 4);
  pen.stroke();
  pen.textAlign = 'center';
  pen.textBaseline = 'alphabetic';
  pen.fillText(text, right - size / 2, y - 8);
}

function drawDirections(pen: CanvasRenderingContext2D, x: number, y: number, camera: Camera, ink: string): void {
  const { right, up, forward } = frameOf(camera);
  pen.font = '600 11px system-ui, sans-serif';
  pen.textAlign = 'center';
  pen.textBaseline = 'middle';
  pen.lineWidth = 1.5;
  const axes = (['x', 'y', 'z'] as const).map((name, k) => ({ name, k, depth: forward[k]! }));
  // Far ones first.
  axes.sort((a, b) => b.depth - a.depth);
  for (const { name, k, depth } of axes) {
    pen.globalAlpha = depth > 0.2 ? 0.45 : 1;
    pen.strokeStyle = ink;
    pen.fillStyle = ink;
    pen.beginPath();
    pen.moveTo(x, y);
    pen.lineTo(x + 22 * right[k]!, y - 22 * up[k]!);
    pen.stroke();
    pen.fillText(name, x + 31 * right[k]!, y - 31 * up[k]!);
  }
  pen.globalAlpha = 1;
}
