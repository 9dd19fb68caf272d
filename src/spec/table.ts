import type { Fields } from './keys.ts';
import { unitsOf } from './quantity.ts';
import {
  BLOOD_FIELDS,
  CLEARANCE_FIELDS,
  JUNCTION_FIELDS,
  SIZING_FIELDS,
  SPEC_FIELDS,
  VISCOSITY_FIELDS,
} from './schema.ts';
import { DEMAND_FIELDS, SHAPE_FIELDS, TISSUE_FIELDS } from './shape-schema.ts';
import { NARROWED_FIELDS, SOLVED_AGAIN_FIELDS } from './solved-again.ts';
import { INLET_FIELDS, TERMINAL_FIELDS, TREE_FIELDS } from './tree-schema.ts';

const SECTIONS: readonly (readonly [string, Fields])[] = [
  ['', SPEC_FIELDS],
  ['tissue', TISSUE_FIELDS],
  ['tissue.demand[]', DEMAND_FIELDS],
  ...Object.entries(SHAPE_FIELDS).map(([name, fields]): readonly [string, Fields] => [`${name}:`, fields]),
  ['trees[]', TREE_FIELDS],
  ['trees[].inlet', INLET_FIELDS],
  ['trees[].terminals', TERMINAL_FIELDS],
  ['blood', BLOOD_FIELDS],
  ['blood.viscosity', VISCOSITY_FIELDS],
  ['sizing', SIZING_FIELDS],
  ['clearance', CLEARANCE_FIELDS],
  ['junctions', JUNCTION_FIELDS],
  ['solved_again', SOLVED_AGAIN_FIELDS],
  ['solved_again.narrowed[]', NARROWED_FIELDS],
];

/** Markdown table of every key of a spec: units, default, range, meaning. Keys of a shape stand after its name. */
export function specTable(): string {
  const rows = ['| key | unit suffix | default | range | meaning |', '|---|---|---|---|---|'];
  for (const [section, fields] of SECTIONS) {
    for (const [name, field] of Object.entries(fields)) {
      if (field.form === 'later') continue;
      const isQuantity = field.form === 'quantity';
      const key = `${prefixOf(section)}${name}${isQuantity ? '_*' : ''}`;
      const units = isQuantity
        ? unitsOf(field.quantity)
            .map((unit) => `\`_${unit}\``)
            .join(' ')
        : '';
      rows.push(
        `| \`${key}\` | ${units} | ${escapeCell(field.fallback || 'required')} | ${escapeCell(field.range)} | ${escapeCell(field.doc)} |`,
      );
    }
  }
  return `${rows.join('\n')}\n`;
}

function prefixOf(section: string): string {
  if (section === '') return '';
  return section.endsWith(':') ? `${section} ` : `${section}.`;
}

function escapeCell(text: string): string {
  return text.replaceAll('|', '\\|');
}
