import { decodeText } from '../../core/text.ts';
import type { FaultList } from '../faults.ts';

/** An element of a VTK XML file. Its text stays in the file's bytes: it may be hundreds of megabytes of numbers. */
export interface Element {
  readonly name: string;
  readonly attributes: Readonly<Record<string, string>>;
  readonly children: Element[];
  /** Its text before its first child: first byte, and one past the last. */
  readonly from: number;
  to: number;
}

const ENTITIES: Readonly<Record<string, string>> = { lt: '<', gt: '>', amp: '&', quot: '"', apos: "'" };
const DEEPEST = 32;
const LONGEST_TAG = 1 << 16;

/**
 * Lists the elements of a VTK XML file up to its appended data, whose bytes are not XML and are not looked at.
 *
 * @param name file, for faults
 * @returns the outermost element, or null after a fault; the text of `AppendedData` starts at its `_`
 * Source: VTK XML formats as documented by Kitware; the part of XML 1.0 that they use (no DTD, no CDATA).
 * Cost: O(bytes outside appended data); no recursion.
 */
export function scanXml(bytes: Uint8Array, name: string, faults: FaultList): Element | null {
  const open: Element[] = [];
  let outermost: Element | null = null;
  let at = 0;
  const broken = (message: string): null => {
    faults.add('xml', `${name} byte ${at}`, message);
    return null;
  };
  for (;;) {
    at = bytes.indexOf(0x3c, at);
    if (at < 0) {
      at = bytes.length;
      return broken(
        outermost === null
          ? 'got no XML element, expected <VTKFile …>'
          : `got the end of the file, expected </${open.at(-1)?.name}>`,
      );
    }
    if (startsWith(bytes, at, '<!--')) {
      const end = find(bytes, '-->', at);
      if (end < 0) return broken('got a comment without end');
      at = end + 3;
      continue;
    }
    if (startsWith(bytes, at, '<!')) return broken('got a declaration, expected elements only');
    const close = tagEnd(bytes, at);
    if (close < 0) return broken('got a tag without end');
    const tag = decodeText(bytes.subarray(at + 1, close));
    if (tag.startsWith('?')) {
      at = close + 1;
      continue;
    }
    if (tag.startsWith('/')) {
      const element = open.pop();
      if (element === undefined || element.name !== tag.slice(1).trim()) {
        return broken(`got <${tag}>, expected ${element === undefined ? 'an element' : `</${element.name}>`}`);
      }
      if (element.to < 0) element.to = at;
      if (open.length === 0) return outermost;
      at = close + 1;
      continue;
    }
    const empty = tag.endsWith('/');
    const element = parseTag(empty ? tag.slice(0, -1) : tag, close + 1);
    if (element === null) return broken(`got <${tag.slice(0, 60)}>, expected a name and attributes in quotes`);
    if (outermost === null) outermost = element;
    else if (open.length === 0) return broken('got a second outermost element');
    const parent = open.at(-1);
    if (parent !== undefined) {
      if (parent.to < 0) parent.to = at;
      parent.children.push(element);
    }
    if (element.name === 'AppendedData' && !empty) {
      element.to = bytes.length;
      return outermost;
    }
    if (empty) {
      element.to = element.from;
      if (open.length === 0) return outermost;
    } else {
      if (open.length === DEEPEST) return broken(`got elements more than ${DEEPEST} deep`);
      open.push(element);
    }
    at = close + 1;
  }
}

/** First child of a name, or undefined. */
export function childOf(element: Element | undefined, name: string): Element | undefined {
  return element?.children.find((child) => child.name === name);
}

function startsWith(bytes: Uint8Array, at: number, text: string): boolean {
  for (let k = 0; k < text.length; k++) if (bytes[at + k] !== text.charCodeAt(k)) return false;
  return true;
}

function find(bytes: Uint8Array, text: string, from: number): number {
  let at = bytes.indexOf(text.charCodeAt(0), from);
  while (at >= 0 && !startsWith(bytes, at, text)) at = bytes.indexOf(text.charCodeAt(0), at + 1);
  return at;
}

/** Where a tag's `>` is, quoted ones passed over; −1 if there is none within reason. */
function tagEnd(bytes: Uint8Array, from: number): number {
  let quote = 0;
  const end = Math.min(bytes.length, from + LONGEST_TAG);
  for (let at = from; at < end; at++) {
    const byte = bytes[at]!;
    if (quote !== 0) {
      if (byte === quote) quote = 0;
    } else if (byte === 0x22 || byte === 0x27) quote = byte;
    else if (byte === 0x3e) return at;
  }
  return -1;
}

function parseTag(tag: string, from: number): Element | null {
  const name = /^[A-Za-z_][\w.-]*/.exec(tag)?.[0];
  if (name === undefined) return null;
  const attributes: Record<string, string> = Object.create(null);
  const attribute = /\s+([A-Za-z_][\w.:-]*)\s*=\s*(?:"([^"]*)"|'([^']*)')/y;
  attribute.lastIndex = name.length;
  let end = name.length;
  for (let match = attribute.exec(tag); match !== null; match = attribute.exec(tag)) {
    attributes[match[1]!] = (match[2] ?? match[3]!).replace(/&(\w+);/g, (all, entity) => ENTITIES[entity] ?? all);
    end = attribute.lastIndex;
  }
  if (tag.slice(end).trim() !== '') return null;
  return { name, attributes, children: [], from, to: -1 };
}
