/** Text made safe to stand in HTML, in an attribute too. */
export function escapeHtml(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&#39;');
}

/**
 * A number for reading: four significant digits, no more zeros than it takes.
 *
 * @returns `–` for null
 */
export function formatNumber(value: number | null, digits = 4): string {
  if (value === null) return '–';
  if (!Number.isFinite(value)) return String(value);
  if (Number.isInteger(value) && Math.abs(value) < 1e15) return groupDigits(String(value));
  const size = Math.abs(value);
  if (size !== 0 && (size < 1e-3 || size >= 1e7)) {
    const [mantissa, exponent] = value.toExponential(digits - 1).split('e') as [string, string];
    return `${groupDigits(trimZeros(mantissa))}·10<sup>${Number(exponent) < 0 ? `−${exponent.slice(1)}` : Number(exponent)}</sup>`;
  }
  const text = size >= Number(`1e${digits}`) ? String(Math.round(value)) : trimZeros(value.toPrecision(digits));
  return groupDigits(text);
}

function trimZeros(text: string): string {
  return text.includes('.') ? text.replace(/\.?0+$/, '') : text;
}

/** A thin space between thousands, a real minus. */
function groupDigits(text: string): string {
  const [whole, part] = text.split('.') as [string, string | undefined];
  const grouped = whole.replace(/\B(?=(\d{3})+$)/g, '\u202f');
  return (part === undefined ? grouped : `${grouped}.${part}`).replace('-', '−');
}

/** A table; cells are HTML, columns after the first are numbers and stand to the right unless `left` names them. */
export function table(
  caption: string,
  head: readonly string[],
  rows: readonly (readonly string[])[],
  left: readonly number[] = [0],
): string {
  const side = (k: number) => (left.includes(k) ? ' class="text"' : '');
  return (
    `<table><caption>${caption}</caption><thead><tr>` +
    `${head.map((cell, k) => `<th scope="col"${side(k)}>${cell}</th>`).join('')}</tr></thead><tbody>` +
    `${rows.map((row) => `<tr>${row.map((cell, k) => `<td${side(k)}>${cell}</td>`).join('')}</tr>`).join('\n')}` +
    '</tbody></table>'
  );
}

/** Unit in which powers up to a largest one read well, and how many of it a watt is. */
export function powerUnit(largest: number): { readonly unit: string; readonly perWatt: number } {
  if (largest >= 1) return { unit: 'W', perWatt: 1 };
  if (largest >= 1e-3) return { unit: 'mW', perWatt: 1e3 };
  return largest >= 1e-6 ? { unit: 'µW', perWatt: 1e6 } : { unit: 'nW', perWatt: 1e9 };
}
