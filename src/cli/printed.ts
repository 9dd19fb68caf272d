/** A power in the unit that fits it. */
export function formatPower(watts: number): string {
  for (const [unit, factor] of [
    ['W', 1],
    ['mW', 1e-3],
    ['µW', 1e-6],
  ] as const) {
    if (watts >= factor) return `${short(watts / factor)} ${unit}`;
  }
  return `${short(watts / 1e-9)} nW`;
}

/** A share in per cent. */
export function formatShare(fraction: number): string {
  return `${short(100 * fraction)} %`;
}

function short(value: number): string {
  return String(Number(value.toPrecision(3)));
}

/** Columns side by side, padded to their widest cell. */
export function layOutColumns(rows: readonly (readonly string[])[]): string {
  const widths = (rows[0] ?? []).map((_, k) => Math.max(...rows.map((row) => row[k]!.length)));
  const lines = rows.map((row) =>
    row
      .map((cell, k) => cell.padEnd(widths[k]!))
      .join('  ')
      .trimEnd(),
  );
  return lines.map((line) => `${line}\n`).join('');
}
