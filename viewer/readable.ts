/** A number to so many significant digits, without trailing zeros; powers of ten where plain digits would be long. */
export function readable(value: number, digits = 4): string {
  if (value === 0) return '0';
  if (!Number.isFinite(value)) return '–';
  const size = Math.abs(value);
  if (size >= 1e6 || size < 1e-3) {
    const [mantissa, exponent] = value.toExponential(digits - 1).split('e');
    return `${trim(mantissa!)} × 10${superscript(Number(exponent))}`;
  }
  const text = size >= 10 ** digits ? value.toFixed(0) : value.toPrecision(digits);
  return trim(text).replace('-', '−');
}

/** A whole number with thin spaces between thousands. */
export function grouped(count: number): string {
  return String(count).replace(/\B(?=(\d{3})+$)/g, '\u2009');
}

function trim(text: string): string {
  return text.includes('.') ? text.replace(/0+$/, '').replace(/\.$/, '') : text;
}

function superscript(exponent: number): string {
  const marks = '⁰¹²³⁴⁵⁶⁷⁸⁹';
  return (exponent < 0 ? '⁻' : '') + [...String(Math.abs(exponent))].map((digit) => marks[Number(digit)]).join('');
}
