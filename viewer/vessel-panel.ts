import { type TreeRecord, tubeLength, vesselName } from './library.ts';
import { plotPressure } from './plot.ts';
import { flowUnit, MICROMETRES, MMHG, type Shown, shearUnit, speedUnit, timeUnit } from './quantities.ts';
import { grouped, readable } from './readable.ts';
import type { Way } from './way.ts';

/** One line of the panel. */
export interface Line {
  readonly label: string;
  readonly value: string;
  /** The same in another unit. */
  readonly also?: string;
}

const inUnit = (shown: Shown, si: number): string => `${readable(shown.from(si))}${shown.unit && ` ${shown.unit}`}`;

/** A vessel's numbers, ready to read. The last place of each is rounded: four digits are shown. */
export function describeVessel(record: TreeRecord, row: number): Line[] {
  const { forest, field, order } = record;
  const parent = forest.parent[row]!;
  const flow = forest.flow[row]!;
  const lines: Line[] = [
    { label: 'Radius', value: inUnit(MICROMETRES, forest.radius[row]!) },
    { label: 'Length', value: inUnit(MICROMETRES, tubeLength(forest, row)) },
    { label: 'Flow', value: inUnit(flowUnit(flow), flow) },
  ];
  if (field !== null) {
    const drains = record.kinds[forest.tree[row]!] === 'drain';
    const ends = drains ? (['Pressure out', 'Pressure in'] as const) : (['Pressure in', 'Pressure out'] as const);
    for (const [label, at] of [
      [ends[0], parent],
      [ends[1], row],
    ] as const) {
      const pascals = field.pressure[at]!;
      lines.push({ label, value: inUnit(MMHG, pascals), also: `${readable(pascals)} Pa` });
    }
    const velocity = field.velocity[row]!;
    const shear = field.wallShear[row]!;
    const transit = field.transit[row]!;
    lines.push({ label: 'Mean velocity', value: inUnit(speedUnit(velocity), velocity) });
    lines.push({ label: 'Wall shear', value: inUnit(shearUnit(shear), shear) });
    lines.push({ label: 'Reynolds number', value: readable(field.reynolds[row]!) });
    lines.push({
      label: drains ? 'Transit to the root' : 'Transit from the root',
      value: inUnit(timeUnit(transit), transit),
    });
  }
  lines.push({ label: 'Strahler order', value: grouped(order[row]!) });
  return lines;
}

/** Fills the panel. `close` and `look` are what its buttons do. */
export function fillPanel(
  panel: HTMLElement,
  record: TreeRecord,
  row: number,
  way: Way,
  close: () => void,
  look: () => void,
): void {
  panel.replaceChildren();
  panel.append(element('h2', `Vessel ${vesselName(record.forest, record.names, row)}`));
  const list = document.createElement('dl');
  for (const line of describeVessel(record, row)) {
    const value = element('dd', line.value);
    if (line.also !== undefined) value.append(' ', element('small', `(${line.also})`));
    list.append(element('dt', line.label), value);
  }
  panel.append(list);
  const vessels = way.rows.length - 1;
  const title = `Way to the root: ${grouped(vessels)} ${vessels === 1 ? 'vessel' : 'vessels'}, ${readable(way.distance[0]! * 1e3)} mm`;
  panel.append(element('h3', title));
  const plot = plotPressure(way);
  if (plot === null) panel.append(element('p', 'The file holds no pressures.', 'quiet'));
  else {
    const holder = document.createElement('div');
    holder.innerHTML = plot;
    panel.append(element('p', 'Pressure along it (mmHg)', 'quiet'), holder);
  }
  const buttons = element('div', '', 'row');
  buttons.append(button('Look at it', look), button('Select none', close));
  panel.append(buttons);
  panel.hidden = false;
}

function element(name: string, text: string, className = ''): HTMLElement {
  const made = document.createElement(name);
  made.textContent = text;
  if (className !== '') made.className = className;
  return made;
}

function button(text: string, press: () => void): HTMLButtonElement {
  const made = document.createElement('button');
  made.type = 'button';
  made.textContent = text;
  made.addEventListener('click', press);
  return made;
}
