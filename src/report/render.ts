import { fromSi, type Unit } from '../core/units.ts';
import { escapeHtml, formatNumber, powerUnit, table } from './html.ts';
import { plotBars, plotDots, plotSteps } from './plot.ts';
import type { Report } from './report.ts';
import { STYLE } from './style.ts';

/**
 * One self-contained HTML page of a report: tables and plots, no script, no network, no font of its own.
 *
 * @returns HTML text, UTF-8
 */
export function renderReport(report: Report): string {
  const title = report.name ?? 'Vessel tree';
  const broken = report.promises.filter((line) => line.held === false).length;
  const sections = [
    keyFigures(report),
    promises(report),
    trees(report),
    territories(report),
    orders(report),
    plots(report),
    resources(report),
    provenance(report),
  ];
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeHtml(title)} – tree report</title>
<link rel="icon" href="data:,">
<style>${STYLE}</style>
</head>
<body>
<header>
<h1>${escapeHtml(title)}</h1>
<p>${count(report.counts.terminals, 'terminal')}, ${count(report.counts.vessels, 'vessel')}, ${count(report.counts.trees, 'tree')}. Made by ${escapeHtml(report.program)}.</p>
</header>
<p class="caution"><strong>Caution.</strong> ${escapeHtml(report.caution)}</p>
${broken > 0 ? `<p class="broken"><strong>${count(broken, 'promise')} not held</strong>; see the table of promises.</p>` : ''}
${report.notes.length > 0 ? `<section><h2>Notes</h2><ul>${report.notes.map((note) => `<li>${escapeHtml(note)}</li>`).join('')}</ul></section>` : ''}
${sections.join('\n')}
</body>
</html>
`;
}

const inUnit = (value: number | null, unit: Unit): string => formatNumber(value === null ? null : fromSi(value, unit));

function count(value: number, noun: string): string {
  return `${formatNumber(value)} ${noun}${value === 1 ? '' : 's'}`;
}

function keyFigures(report: Report): string {
  const { cost, volumes, counts, horton, angles } = report;
  const { unit, perWatt } = powerUnit(cost.total_W);
  const power = (watts: number): string => `${formatNumber(watts * perWatt)} ${unit}`;
  const rows: [string, string][] = [
    ['pumping power', power(cost.pumping_W)],
    ['maintenance power', power(cost.maintenance_W)],
    ['total power', `<strong>${power(cost.total_W)}</strong>`],
    ['vessel volume', `${formatNumber(volumes.vessel_m3 * 1e9)} mm³`],
  ];
  if (volumes.tissue_m3 !== null) {
    rows.push(
      ['tissue volume', `${formatNumber(volumes.tissue_m3 * 1e9)} mm³`],
      ['vessel share of tissue', `${formatNumber(volumes.fraction! * 100)} %`],
    );
  }
  rows.push(
    ['junctions', formatNumber(counts.junctions)],
    ['bends', formatNumber(counts.bends)],
    ['angle between branches', `${formatNumber(angles.mean_deg, 3)}° ± ${formatNumber(angles.deviation_deg, 3)}°`],
  );
  if (horton !== null) {
    rows.push([
      'ratio of successive orders',
      `number ${formatNumber(horton.branching, 3)}, diameter ${formatNumber(horton.diameter, 3)}, length ${formatNumber(horton.length, 3)}`,
    ]);
  }
  return `<section><h2>Key figures</h2><dl>${rows.map(([name, value]) => `<div><dt>${name}</dt><dd>${value}</dd></div>`).join('')}</dl></section>`;
}

function promises(report: Report): string {
  if (report.promises.length === 0) return '';
  const amount = (value: number | null, unit: string): string =>
    value === null || unit === '1' ? formatNumber(value) : `${formatNumber(value)} ${escapeHtml(unit)}`;
  const rows = report.promises.map((line) => [
    escapeHtml(line.promise),
    line.held === null ? 'not looked at' : line.held ? 'held' : '<strong class="no">NOT HELD</strong>',
    amount(line.worst, line.unit),
    `${line.sense === 'at-least' ? '≥' : '≤'} ${amount(line.limit, line.unit)}`,
    escapeHtml(line.where ?? '–'),
    escapeHtml(line.note),
  ]);
  return `<section><h2>Promises</h2>${table('Recomputed from the result.', ['promise', 'verdict', 'worst', 'limit', 'where', 'note'], rows, [0, 1, 4, 5])}</section>`;
}

function trees(report: Report): string {
  const rows = report.trees.map((tree) => [
    escapeHtml(tree.name),
    tree.kind,
    formatNumber(tree.terminals),
    inUnit(tree.root_flow_m3_s, 'mL_min'),
    inUnit(2 * tree.root_radius_m, 'um'),
    inUnit(tree.root_pressure_Pa, 'mmHg'),
    inUnit(tree.terminal_pressure?.min_Pa ?? null, 'mmHg'),
    inUnit(tree.terminal_pressure?.mean_Pa ?? null, 'mmHg'),
    inUnit(tree.terminal_pressure?.max_Pa ?? null, 'mmHg'),
    inUnit(tree.terminal_pressure?.asked_Pa ?? null, 'mmHg'),
    formatNumber(tree.transit?.mean_s ?? null),
  ]);
  const head = [
    'tree',
    'kind',
    'terminals',
    'flow, mL/min',
    'root diameter, µm',
    'root, mmHg',
    'terminals: least, mmHg',
    'mean, mmHg',
    'most, mmHg',
    'asked, mmHg',
    'mean transit, s',
  ];
  return `<section><h2>Trees</h2>${table('Flow and pressure at the ends; means are by flow.', head, rows, [0, 1])}</section>`;
}

function territories(report: Report): string {
  const rows = report.trees.flatMap(({ name, territory }) => {
    if (territory === null) return [];
    const { min_m3, median_m3, max_m3, variation } = territory;
    return [
      [
        escapeHtml(name),
        ...[min_m3, median_m3, max_m3].map((size) => formatNumber(size * 1e9)),
        formatNumber(variation, 3),
      ],
    ];
  });
  if (rows.length === 0) return '';
  const caption =
    'Of the terminals: volume of the tissue nearer to one than to the others of its tree, times its demand where that differs over the tissue. Variation is the standard deviation over the mean.';
  return `<section><h2>Territories</h2>${table(caption, ['tree', 'least, mm³', 'median, mm³', 'most, mm³', 'variation'], rows)}</section>`;
}

function orders(report: Report): string {
  const rows = report.orders
    .slice()
    .reverse()
    .map((order) => [
      formatNumber(order.order),
      formatNumber(order.segments),
      formatNumber(order.elements),
      `${inUnit(order.diameter_mean_m, 'um')} ± ${inUnit(order.diameter_deviation_m, 'um')}`,
      `${inUnit(order.length_mean_m, 'mm')} ± ${inUnit(order.length_deviation_m, 'mm')}`,
      inUnit(order.pressure_mean_Pa, 'mmHg'),
      formatNumber(order.wall_shear_mean_Pa),
    ]);
  const head = ['order', 'segments', 'elements', 'diameter, µm', 'length, mm', 'pressure, mmHg', 'wall shear, Pa'];
  return `<section><h2>Orders</h2>${table('Strahler orders, 1 at the terminals. Segments run from junction to junction; elements are chains of one order; ± is one standard deviation over elements.', head, rows, [])}</section>`;
}

function plots(report: Report): string {
  const { orders, angles, resources } = report;
  const dots = (y: (order: (typeof orders)[number]) => number, spread?: (order: (typeof orders)[number]) => number) =>
    orders.map((order) => ({
      x: order.order,
      y: y(order),
      ...(spread === undefined ? {} : { spread: spread(order) }),
    }));
  const x = 'Strahler order';
  const figures = [
    plotDots(
      { title: 'Diameter of elements, mean and deviation', x, y: 'diameter, µm' },
      dots(
        (order) => fromSi(order.diameter_mean_m, 'um'),
        (order) => fromSi(order.diameter_deviation_m, 'um'),
      ),
      true,
    ),
    plotDots(
      { title: 'Length of elements, mean and deviation', x, y: 'length, mm' },
      dots(
        (order) => fromSi(order.length_mean_m, 'mm'),
        (order) => fromSi(order.length_deviation_m, 'mm'),
      ),
      true,
    ),
    plotDots(
      { title: 'Number of elements', x, y: 'elements' },
      dots((order) => order.elements),
      true,
    ),
  ];
  if (orders.length > 0 && orders[0]!.pressure_mean_Pa !== null) {
    figures.push(
      plotDots(
        { title: 'Mean pressure', x, y: 'pressure, mmHg' },
        dots((order) => fromSi(order.pressure_mean_Pa!, 'mmHg')),
        false,
      ),
      plotDots(
        { title: 'Mean wall shear', x, y: 'wall shear, Pa' },
        dots((order) => order.wall_shear_mean_Pa!),
        false,
      ),
    );
  }
  if (angles.pairs > 0) {
    figures.push(
      plotBars(
        { title: 'Angle between branches of a junction', x: 'angle, degrees', y: 'pairs' },
        angles.bins.map((bin) => ({ from: bin.from_deg, to: bin.to_deg, count: bin.count })),
      ),
    );
  }
  // Growth multiplies the cost, refinement takes a few percent off it: on one axis the second would not be seen.
  const history = resources.cost_against_time;
  for (const [title, points] of [
    ['Cost against time while the tree grows', history.filter(({ stage }) => stage === 'growth')],
    ['Cost against time', history.filter(({ stage }) => stage !== 'growth')],
  ] as const) {
    if (points.length < 2) continue;
    const { unit, perWatt } = powerUnit(points.reduce((most, point) => Math.max(most, point.cost_W), 0));
    figures.push(
      plotSteps(
        { title, x: 'time, s', y: `total power, ${unit}` },
        points.map((point) => ({ x: point.time_s, y: point.cost_W * perWatt, series: point.stage })),
      ),
    );
  }
  return `<section><h2>Plots</h2><div class="plots">${figures.join('')}</div></section>`;
}

function resources(report: Report): string {
  const { wall_time_s, peak_memory_bytes, stages } = report.resources;
  if (wall_time_s === null && peak_memory_bytes === null && stages.length === 0) return '';
  const rows = stages.map((stage) => [escapeHtml(stage.stage), formatNumber(stage.time_s)]);
  const total = `<p>Wall time ${formatNumber(wall_time_s)} s, peak memory ${formatNumber(peak_memory_bytes === null ? null : Math.round(peak_memory_bytes / 1e6))} MB.</p>`;
  return `<section class="narrow"><h2>Time and memory</h2>${total}${rows.length > 0 ? table('Of this run on its machine.', ['stage', 'time, s'], rows) : ''}</section>`;
}

function provenance(report: Report): string {
  if (report.provenance === null) return '<section><h2>Provenance</h2><p>The file names no spec.</p></section>';
  const text = typeof report.provenance === 'string' ? report.provenance : JSON.stringify(report.provenance, null, 2);
  return `<section><h2>Provenance</h2><details><summary>The spec as resolved, every default filled in</summary><pre>${escapeHtml(text)}</pre></details></section>`;
}
