import type { Comparison, QuantitySummary, TreeCounts } from './comparison.ts';

/**
 * A comparison as text: the verdict with the first difference, counts side by side, a line a quantity.
 *
 * @returns lines parted by \n, with one at the end
 */
export function compareTable(result: Comparison): string {
  const lines = [describeVerdict(result)];
  if (result.first !== null) lines.push(`first difference: ${result.first.message}`);
  if (result.firstShape !== null && result.firstShape !== result.first) {
    lines.push(`the shapes part: ${result.firstShape.message}`);
  }
  lines.push('');
  const counts: [keyof TreeCounts, string][] = [
    ['trees', 'trees'],
    ['vessels', 'vessels'],
    ['terminals', 'terminals'],
    ['bends', 'bends'],
    ['length_m', 'length, m'],
    ['volume_m3', 'volume, m³'],
  ];
  const side = (of: TreeCounts, key: keyof TreeCounts) => String(Number(of[key].toPrecision(9)));
  lines.push(
    ...layOut([
      ['', 'A', 'B'],
      ...counts.map(([key, title]) => [title, side(result.countsA, key), side(result.countsB, key)]),
      ['matched vessels', String(result.matched), String(result.matched)],
    ]),
    '',
    ...layOut([
      ['quantity', 'tolerance', 'greatest difference', 'relative', 'over', 'of', 'vessel in A', 'in B'],
      ...result.quantities.map(summaryCells),
    ]),
  );
  if (result.notes.length > 0) lines.push('', ...result.notes.map((note) => `note: ${note}`));
  return `${lines.join('\n')}\n`;
}

/** The verdict in a few words. */
export function describeVerdict(result: Comparison): string {
  if (result.verdict === 'identical') {
    return result.identity === 'bytes' ? 'identical: the same in every bit' : 'identical: the same in every value';
  }
  if (result.verdict === 'equivalent') return 'equivalent: the same tree within the tolerances';
  if (result.reason === 'topology') return 'different: the trees have different shapes';
  return result.quantities.some((summary) => summary.exceeded > 0)
    ? 'different: the same shape, but values differ by more than the tolerances'
    : 'different: the same shape, but one lacks what the other has';
}

function summaryCells(summary: QuantitySummary): string[] {
  if (summary.lacking !== null) return [summary.title, '', `${summary.lacking} has none`, '', '', '', '', ''];
  if (summary.compared === 0) return [summary.title, '', summary.skipped ?? 'not compared', '', '', '', '', ''];
  return [
    summary.title,
    `${shorten(summary.tolerance)}${summary.relative ? ' relative' : withUnit(summary.unit)}`,
    `${shorten(summary.maxAbsolute)}${withUnit(summary.unit)}`,
    Number.isNaN(summary.maxRelative) ? '' : shorten(summary.maxRelative),
    String(summary.exceeded),
    String(summary.compared),
    summary.vesselA ?? '',
    summary.vesselB ?? '',
  ];
}

function withUnit(unit: string): string {
  return unit === '1' ? '' : ` ${unit}`;
}

function shorten(value: number): string {
  return String(Number(value.toPrecision(4)));
}

/** Columns padded to their widest cell. */
function layOut(rows: readonly (readonly string[])[]): string[] {
  const widths = rows[0]!.map((_, k) => Math.max(...rows.map((row) => row[k]!.length)));
  return rows.map((row) =>
    row
      .map((cell, k) => cell.padEnd(widths[k]!))
      .join('  ')
      .trimEnd(),
  );
}
