import { MMHG } from './quantities.ts';
import { readable } from './readable.ts';
import { ticksOf } from './scale.ts';
import type { Way } from './way.ts';

const SIZE = { width: 248, height: 118, left: 40, right: 8, top: 8, bottom: 26 };

/**
 * A small plot of pressure (mmHg) against the way from the root (mm), as SVG text. The chosen vessel is the last piece.
 *
 * @returns null where there is no pressure
 */
export function plotPressure(way: Way): string | null {
  if (way.pressure === null || way.rows.length < 2) return null;
  const x = way.distance.map((metres) => metres * 1e3).reverse();
  const y = way.pressure.map((pascals) => MMHG.from(pascals)).reverse();
  const most = x.at(-1)! || 1;
  let low = Math.min(...y);
  let high = Math.max(...y);
  const spread = high - low || 1;
  low -= 0.04 * spread;
  high += 0.04 * spread;
  const right = SIZE.width - SIZE.right;
  const bottom = SIZE.height - SIZE.bottom;
  const px = (value: number) => (SIZE.left + (value / most) * (right - SIZE.left)).toFixed(1);
  const py = (value: number) => (bottom - ((value - low) / (high - low)) * (bottom - SIZE.top)).toFixed(1);
  const points = x.map((value, i) => `${px(value)},${py(y[i]!)}`);
  const parts = [];
  for (const tick of ticksOf({ low, high, log: false }, 4)) {
    parts.push(`<line x1="${SIZE.left}" x2="${right}" y1="${py(tick)}" y2="${py(tick)}" stroke="#d9d7cf"/>`);
    parts.push(`<text x="${SIZE.left - 5}" y="${py(tick)}" dy="0.35em" text-anchor="end">${readable(tick)}</text>`);
  }
  for (const tick of ticksOf({ low: 0, high: most, log: false }, 4)) {
    parts.push(`<line x1="${px(tick)}" x2="${px(tick)}" y1="${bottom}" y2="${bottom + 3}" stroke="#55626a"/>`);
    parts.push(`<text x="${px(tick)}" y="${bottom + 13}" text-anchor="middle">${readable(tick)}</text>`);
  }
  parts.push(`<path d="M${SIZE.left} ${SIZE.top}V${bottom}H${right}" fill="none" stroke="#55626a"/>`);
  parts.push(`<polyline points="${points.join(' ')}" fill="none" stroke="#14576b" stroke-width="1.8"/>`);
  parts.push(`<polyline points="${points.slice(-2).join(' ')}" fill="none" stroke="#b3261e" stroke-width="4"/>`);
  parts.push(`<text x="${right}" y="${SIZE.height - 1}" text-anchor="end">mm from the root</text>`);
  const label = `Pressure along the way: ${readable(y[0]!)} mmHg at the root, ${readable(y.at(-1)!)} mmHg at the vessel's far end`;
  return (
    `<svg viewBox="0 0 ${SIZE.width} ${SIZE.height}" role="img" aria-label="${label}" ` +
    `font-size="10" fill="#55626a" font-family="system-ui, sans-serif">${parts.join('')}</svg>`
  );
}
