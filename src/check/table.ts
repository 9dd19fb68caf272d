import type { CheckResult, PromiseResult } from './result.ts';

/**
 * The result as a text table: a line a promise, then the findings, each with vessel, value and limit.
 *
 * @returns lines parted by \n, with one at the end
 */
export function checkTable(result: CheckResult): string {
  const rows = result.promises.map((promise) => [
    promise.held === null ? '–' : promise.held ? 'held' : 'BROKEN',
    promise.id,
    `${promise.sense === 'at-least' ? '≥' : '≤'} ${formatValue(promise.limit, promise.unit)}`,
    promise.worst === null ? '' : formatValue(promise.worst, promise.unit),
    promise.where ?? '',
    promise.held === null ? '' : String(promise.checked),
    promise.note,
  ]);
  const head = ['', 'promise', 'limit', 'worst', 'where', 'checked', 'note'];
  const widths = head.map((title, k) => Math.max(title.length, ...rows.map((row) => row[k]!.length)));
  const line = (row: readonly string[]) =>
    row
      .map((cell, k) => (k === row.length - 1 ? cell : cell.padEnd(widths[k]!)))
      .join('  ')
      .trimEnd();
  const lines = [line(head), ...rows.map(line)];
  for (const promise of result.promises) {
    if (promise.failures === 0) continue;
    const found = result.findings.filter((finding) => finding.promise === promise.id);
    lines.push('', `${promise.id}: ${promise.title}: ${countFindings(promise, found.length)}`);
    for (const finding of found) lines.push(`  ${finding.vessel}: ${finding.message}`);
  }
  if (result.warnings.length > 0) {
    lines.push('', 'warnings:');
    for (const warning of result.warnings) lines.push(`  ${warning.vessel}: ${warning.message}`);
  }
  const broken = result.promises.filter((promise) => promise.held === false).length;
  const open = result.promises.filter((promise) => promise.held === null).length;
  const kept = result.promises.length - broken - open;
  lines.push('', `${kept} held, ${broken} broken, ${open} not checked`);
  return `${lines.join('\n')}\n`;
}

function countFindings(promise: PromiseResult, listed: number): string {
  const whole = `${promise.failures} finding${promise.failures === 1 ? '' : 's'}`;
  return listed < promise.failures ? `${whole}, first ${listed} listed` : whole;
}

/** Lengths in µm, angles in degrees, the rest as it is. */
function formatValue(value: number, unit: string): string {
  if (unit === 'm') return `${shorten(1e6 * value)} µm`;
  if (unit === 'rad') return `${shorten((180 / Math.PI) * value)}°`;
  return unit === '1' ? shorten(value) : `${shorten(value)} ${unit}`;
}

function shorten(value: number): string {
  if (value === 0) return '0';
  const size = Math.abs(value);
  return size >= 1e5 || size < 1e-3 ? value.toExponential(2) : String(Number(value.toPrecision(4)));
}
