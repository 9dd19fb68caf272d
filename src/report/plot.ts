import { extent } from 'd3-array';
import { scaleLinear, scaleLog } from 'd3-scale';
import { curveStepAfter, line } from 'd3-shape';
import { escapeHtml } from './html.ts';

/** Drawing area in SVG units; text is set at 11. */
const WIDTH = 340;
const HEIGHT = 220;
const LEFT = 54;
const RIGHT = 12;
const TOP = 10;
const BOTTOM = 40;

type Scale = ((value: number) => number) & { ticks(count?: number): number[] };

/** Axis labels and a sentence for those who cannot see the plot. */
export interface Labels {
  readonly title: string;
  readonly x: string;
  readonly y: string;
}

export interface Dot {
  readonly x: number;
  readonly y: number;
  /** Half the length of the whisker, in y's unit. */
  readonly spread?: number;
}

/**
 * Dots joined by a thin line, a whisker of one deviation on each.
 *
 * @param log a logarithmic y axis; all y must then be > 0, whiskers that would reach below are cut
 */
export function plotDots(labels: Labels, dots: readonly Dot[], log: boolean): string {
  const xs = dots.map((dot) => dot.x);
  const low = dots.map((dot) => (log ? dot.y : dot.y - (dot.spread ?? 0)));
  const high = dots.map((dot) => dot.y + (dot.spread ?? 0));
  const x = scaleLinear()
    .domain([Math.min(...xs) - 0.5, Math.max(...xs) + 0.5])
    .range([LEFT, WIDTH - RIGHT]);
  const y = verticalScale([...low, ...high], log);
  const [bottom] = y.domain() as [number, number];
  const path = line<Dot>()
    .x((dot) => x(dot.x))
    .y((dot) => y(dot.y))
    .digits(1)(dots as Dot[]);
  let marks = `<path class="thin" d="${path}"/>`;
  for (const dot of dots) {
    const at = x(dot.x).toFixed(1);
    if (dot.spread !== undefined && dot.spread > 0) {
      const from = y(Math.max(dot.y - dot.spread, bottom)).toFixed(1);
      marks += `<path class="whisker" d="M${at} ${from}V${y(dot.y + dot.spread).toFixed(1)}"/>`;
    }
    marks += `<circle cx="${at}" cy="${y(dot.y).toFixed(1)}" r="3.2"/>`;
  }
  const ticks = dots.length <= 16 ? xs : x.ticks(8).filter(Number.isInteger);
  return frame(labels, x, ticks, y, log, marks);
}

/** Bars that touch, for counts in bins. */
export function plotBars(labels: Labels, bars: readonly { from: number; to: number; count: number }[]): string {
  const x = scaleLinear()
    .domain([bars[0]!.from, bars.at(-1)!.to])
    .range([LEFT, WIDTH - RIGHT]);
  const y = verticalScale([0, ...bars.map((bar) => bar.count)], false);
  const marks = bars
    .filter((bar) => bar.count > 0)
    .map((bar) => {
      const [a, b, top] = [x(bar.from), x(bar.to), y(bar.count)];
      return `<rect x="${a.toFixed(1)}" y="${top.toFixed(1)}" width="${(b - a).toFixed(1)}" height="${(HEIGHT - BOTTOM - top).toFixed(1)}"/>`;
    })
    .join('');
  return frame(labels, x, x.ticks(7), y, false, marks);
}

/** Steps over a continuous x, for a cost that holds until the next one is known. A dot marks where a new series begins. */
export function plotSteps(labels: Labels, points: readonly { x: number; y: number; series: string }[]): string {
  const [first, last] = extent(points, (point) => point.x) as [number, number];
  const x = scaleLinear()
    .domain(last > first ? [first, last] : [first - 0.5, first + 0.5])
    .nice(6)
    .range([LEFT, WIDTH - RIGHT]);
  const y = verticalScale(
    points.map((point) => point.y),
    false,
  );
  const path = line<(typeof points)[number]>()
    .x((point) => x(point.x))
    .y((point) => y(point.y))
    .curve(curveStepAfter)
    .digits(1)(points as (typeof points)[number][]);
  let marks = `<path class="line" d="${path}"/>`;
  points.forEach((point, i) => {
    if (i > 0 && points[i - 1]!.series === point.series) return;
    const at = x(point.x);
    const height = y(point.y);
    const late = at > WIDTH * 0.6;
    marks +=
      `<circle cx="${at.toFixed(1)}" cy="${height.toFixed(1)}" r="3.2"/>` +
      `<text class="note" x="${(at + (late ? -6 : 6)).toFixed(1)}" y="${Math.max(TOP + 10, height - 6).toFixed(1)}"` +
      `${late ? ' text-anchor="end"' : ''}>${escapeHtml(point.series)}</text>`;
  });
  return frame(labels, x, x.ticks(6), y, false, marks);
}

function verticalScale(values: readonly number[], log: boolean) {
  const [least, most] = extent(values) as [number, number];
  const range = [HEIGHT - BOTTOM, TOP];
  if (log)
    return scaleLog()
      .domain(least < most ? [least, most] : [least / 2, most * 2])
      .nice()
      .range(range);
  // Values that differ by rounding alone are drawn as the level line they are.
  const flat = most - least <= 1e-6 * Math.max(Math.abs(least), Math.abs(most));
  const pad = flat ? Math.abs(least) / 10 || 1 : 0;
  return scaleLinear()
    .domain([least - pad, most + pad])
    .nice(5)
    .range(range);
}

function frame(labels: Labels, x: Scale, xTicks: readonly number[], y: Scale, log: boolean, marks: string): string {
  const base = HEIGHT - BOTTOM;
  const yTicks = log ? decades(y) : y.ticks(5);
  const parts = [
    ...yTicks.map((tick) => {
      const at = y(tick).toFixed(1);
      return `<path class="grid" d="M${LEFT} ${at}H${WIDTH - RIGHT}"/><text x="${LEFT - 6}" y="${at}" dy="0.35em" text-anchor="end">${tickText(tick)}</text>`;
    }),
    ...xTicks.map((tick) => {
      const at = x(tick).toFixed(1);
      return `<path class="tick" d="M${at} ${base}v4"/><text x="${at}" y="${base + 15}" text-anchor="middle">${tickText(tick)}</text>`;
    }),
  ];
  return (
    `<figure><svg viewBox="0 0 ${WIDTH} ${HEIGHT}" role="img" aria-label="${escapeHtml(labels.title)}">` +
    `${parts.join('')}<path class="axis" d="M${LEFT} ${TOP}V${base}H${WIDTH - RIGHT}"/>${marks}` +
    `<text x="${(LEFT + WIDTH - RIGHT) / 2}" y="${HEIGHT - 6}" text-anchor="middle">${escapeHtml(labels.x)}</text>` +
    `<text transform="translate(11 ${(TOP + base) / 2}) rotate(-90)" text-anchor="middle">${escapeHtml(labels.y)}</text>` +
    `</svg><figcaption>${escapeHtml(labels.title)}</figcaption></figure>\n`
  );
}

/** Few enough marks of a logarithmic axis to be read: whole decades, with 2 and 5 between where there are few. */
function decades(y: Scale): number[] {
  const leading = (tick: number) => Number(tick.toExponential(6).charAt(0));
  const all = y.ticks();
  const tens = all.filter((tick) => leading(tick) === 1);
  if (tens.length > 7) return tens.filter((_, k) => k % Math.ceil(tens.length / 6) === 0);
  return tens.length > 2 ? tens : all.filter((tick) => [1, 2, 5].includes(leading(tick)));
}

function tickText(tick: number): string {
  const size = Math.abs(tick);
  if (size !== 0 && (size < 1e-3 || size >= 1e6)) return tick.toExponential(0).replace('e+', 'e').replace('-', '−');
  return String(Number(tick.toPrecision(6))).replace('-', '−');
}
