import type { Comparison } from './comparison.ts';
import { compareTable, describeVerdict } from './table.ts';

export interface JUnitOptions {
  /** Name of the suite, e.g. the two paths. */
  readonly name?: string | undefined;
}

/**
 * A comparison as JUnit XML: one case for the shape and one a quantity; quantities that were not compared are skipped.
 *
 * Source: the element and attribute names that CI servers read; common practice, no standard.
 */
export function compareJUnit(result: Comparison, options: JUnitOptions = {}): string {
  const same = result.verdict === 'identical';
  const cases: { name: string; body: string; kind: 'passed' | 'failed' | 'skipped' }[] = [];
  const shape = result.firstShape;
  cases.push(
    shape === null
      ? { name: 'topology', body: '', kind: 'passed' }
      : { name: 'topology', body: failure('topology', shape.message, compareTable(result)), kind: 'failed' },
  );
  for (const summary of result.quantities) {
    if (summary.lacking !== null && !same) {
      const message = `${summary.title}: ${summary.lacking} has none`;
      cases.push({ name: summary.key, body: failure('values', message, message), kind: 'failed' });
    } else if (summary.compared === 0 && !same) {
      const why = escapeXml(summary.skipped ?? 'not compared');
      cases.push({ name: summary.key, body: `<skipped message="${why}"/>`, kind: 'skipped' });
    } else if (summary.exceeded > 0 && !same) {
      const where = `greatest at ${summary.vesselA} in A, ${summary.vesselB} in B`;
      const size = summary.relative ? `${summary.maxRelative} relative` : `${summary.maxAbsolute} ${summary.unit}`;
      const message =
        `${summary.title}: ${summary.exceeded} of ${summary.compared} differ by more than ${summary.tolerance}; ` +
        `${size}, ${where}`;
      const own = result.first !== null && result.first.what === summary.title ? result.first.message : message;
      cases.push({ name: summary.key, body: failure('values', message, own), kind: 'failed' });
    } else cases.push({ name: summary.key, body: '', kind: 'passed' });
  }
  const failures = cases.filter((one) => one.kind === 'failed').length;
  const skipped = cases.filter((one) => one.kind === 'skipped').length;
  const name = escapeXml(options.name ?? 'compare');
  const counts = `tests="${cases.length}" failures="${failures}" errors="0"`;
  const lines = [
    '<?xml version="1.0" encoding="UTF-8"?>',
    `<testsuites name="vesselwright compare" ${counts}>`,
    `  <testsuite name="${name}" ${counts} skipped="${skipped}">`,
    ...cases.map((one) => {
      const head = `    <testcase classname="compare.tree" name="${escapeXml(one.name)}"`;
      return one.body === '' ? `${head}/>` : `${head}>${one.body}</testcase>`;
    }),
    `    <system-out>${escapeXml(describeVerdict(result))}</system-out>`,
    '  </testsuite>',
    '</testsuites>',
  ];
  return `${lines.join('\n')}\n`;
}

function failure(type: string, message: string, text: string): string {
  return `<failure type="${type}" message="${escapeXml(message)}">${escapeXml(text)}</failure>`;
}

/** Text safe in attributes and content; characters that XML 1.0 cannot hold become U+FFFD. */
function escapeXml(text: string): string {
  let safe = '';
  for (const character of text) {
    const code = character.codePointAt(0)!;
    const control = code < 0x20 && code !== 0x09 && code !== 0x0a && code !== 0x0d;
    safe += control || (code >= 0xd800 && code <= 0xdfff) || code === 0xfffe || code === 0xffff ? '\ufffd' : character;
  }
  return safe
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&apos;');
}
