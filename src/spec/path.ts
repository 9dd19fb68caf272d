/** A spec path as its reader writes it: `tissue.parts[1].radius_mm`; the whole spec is `spec`. */
export function formatPath(path: readonly PropertyKey[]): string {
  let text = '';
  for (const step of path) {
    if (typeof step === 'number') text += `[${step}]`;
    else if (typeof step === 'string' && /^[A-Za-z_$][A-Za-z0-9_$]{0,79}$/.test(step))
      text += text === '' ? step : `.${step}`;
    else {
      const name = String(step);
      text += `[${JSON.stringify(name.length > 60 ? `${name.slice(0, 57)}...` : name)}]`;
    }
  }
  return text === '' ? 'spec' : text;
}
