import { type Fault, inputError } from '../core/errors.ts';
import { quote } from './got.ts';
import { formatPath } from './path.ts';

/** Lists and objects inside one another; a spec of any sense needs a dozen. */
export const MOST_NESTED = 60;

/** A JSON value, and faults of keys that would be dropped without a word later: given twice, or `__proto__`. */
export interface JsonText {
  readonly value: unknown;
  readonly faults: readonly Fault[];
}

/**
 * Parses JSON text, naming line and column of what is broken; engines differ in what they say and often name no place.
 *
 * @param where name of the text, for the fault's place: `where:line:column`
 * @throws InputError of one fault, because after the first broken place the rest cannot be read
 */
export function readJsonText(text: string, where: string): JsonText {
  const body = text.startsWith('\uFEFF') ? text.slice(1) : text;
  const scan = new JsonScan(body);
  const broken = scan.run();
  if (broken) {
    const { line, column } = placeOf(body, broken.offset);
    throw inputError(broken.code, `${where}:${line}:${column}`, broken.message);
  }
  return { value: JSON.parse(body), faults: scan.faults };
}

/** Line and column, both from 1, of an offset into a text. */
export function placeOf(text: string, offset: number): { readonly line: number; readonly column: number } {
  let line = 1;
  let start = 0;
  for (let next = text.indexOf('\n'); next !== -1 && next < offset; next = text.indexOf('\n', next + 1)) {
    line++;
    start = next + 1;
  }
  return { line, column: offset - start + 1 };
}

class Broken extends Error {
  readonly offset: number;
  readonly code: string;

  constructor(offset: number, message: string, code = 'bad-json') {
    super(message);
    this.offset = offset;
    this.code = code;
  }
}

const SPACE = /[ \t\r\n]*/y;
const NUMBER = /-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?/y;
const WORD = /[\p{L}\p{N}_$.+-]+/uy;
const ESCAPE = /\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4})/y;

/** Walks a text once by the grammar of RFC 8259; keeps no values. */
class JsonScan {
  readonly faults: Fault[] = [];
  private readonly text: string;
  private readonly path: (string | number)[] = [];
  private at = 0;

  constructor(text: string) {
    this.text = text;
  }

  run(): Broken | undefined {
    try {
      this.skipSpace();
      this.readValue(0);
      this.skipSpace();
      if (this.at < this.text.length) throw this.expected('the end of the text');
      return undefined;
    } catch (error) {
      if (error instanceof Broken) return error;
      throw error;
    }
  }

  private readValue(depth: number): void {
    if (depth > MOST_NESTED) {
      const message = `got lists and objects more than ${MOST_NESTED} deep, expected at most ${MOST_NESTED}`;
      throw new Broken(this.at, message, 'too-deep');
    }
    const next = this.text[this.at];
    if (next === '{') this.readObject(depth);
    else if (next === '[') this.readList(depth);
    else if (next === '"') this.readString();
    else this.readPlain();
  }

  private readObject(depth: number): void {
    const seen = new Set<string>();
    this.at++;
    this.skipSpace();
    if (this.text[this.at] === '}') {
      this.at++;
      return;
    }
    for (;;) {
      if (this.text[this.at] !== '"') throw this.expected('a key in double quotes');
      const start = this.at;
      const key = this.readString();
      this.path.push(key);
      if (seen.has(key)) this.reportDoubled(start);
      if (key === '__proto__') this.reportPrototype();
      seen.add(key);
      this.skipSpace();
      if (this.text[this.at] !== ':') throw this.expected(`a colon after the key ${quote(key)}`);
      this.at++;
      this.skipSpace();
      this.readValue(depth + 1);
      this.path.pop();
      this.skipSpace();
      if (this.text[this.at] === '}') break;
      if (this.text[this.at] !== ',') throw this.expected('a comma or } in an object');
      this.at++;
      this.skipSpace();
    }
    this.at++;
  }

  private readList(depth: number): void {
    this.at++;
    this.skipSpace();
    if (this.text[this.at] === ']') {
      this.at++;
      return;
    }
    for (let row = 0; ; row++) {
      this.path.push(row);
      this.readValue(depth + 1);
      this.path.pop();
      this.skipSpace();
      if (this.text[this.at] === ']') break;
      if (this.text[this.at] !== ',') throw this.expected('a comma or ] in a list');
      this.at++;
      this.skipSpace();
    }
    this.at++;
  }

  private readString(): string {
    const start = this.at;
    this.at++;
    // A loop, not one pattern: a pattern over a text of many megabytes runs out of stack.
    for (let code = this.code(); code !== 34; code = this.code()) {
      if (code === 92) {
        const escaped = this.match(ESCAPE).length;
        if (escaped === 0)
          throw this.expected('an escape that JSON knows, such as \\\\ for a backslash', this.at, '\\');
        this.at += escaped;
      } else if (code >= 32) this.at++;
      else throw this.expected('a double quote that ends the text, on the same line');
    }
    this.at++;
    return JSON.parse(this.text.slice(start, this.at));
  }

  private readPlain(): void {
    const start = this.at;
    const number = this.match(NUMBER);
    const word = this.match(WORD);
    if (number !== '' && number === word) this.at += number.length;
    else if (word === 'true' || word === 'false' || word === 'null') this.at += word.length;
    else if (/^[-+.]?[0-9]/.test(word)) throw this.expected('a number such as 12, 0.5 or 2e-3', start, word);
    else
      throw this.expected(
        'a value: a number, text in double quotes, true, false, null, a list or an object',
        start,
        word,
      );
  }

  private reportDoubled(offset: number): void {
    const { line, column } = placeOf(this.text, offset);
    const message = `got the key twice (again in line ${line}, column ${column}), expected it once`;
    this.faults.push({ code: 'doubled-key', where: formatPath(this.path), message });
  }

  private reportPrototype(): void {
    const message = 'got an unknown key, expected a known one';
    this.faults.push({ code: 'unknown-key', where: formatPath(this.path), message });
  }

  private expected(wanted: string, offset = this.at, word = ''): Broken {
    const rest = word || this.match(WORD) || String.fromCodePoint(this.text.codePointAt(offset) ?? 0);
    const got =
      this.text.trim() === '' ? 'an empty text' : offset >= this.text.length ? 'the end of the text' : quote(rest);
    return new Broken(offset, `got ${got}, expected ${this.text.trim() === '' ? 'a JSON object' : wanted}`);
  }

  /** The code unit here; −1 at the end of the text. */
  private code(): number {
    return this.at < this.text.length ? this.text.charCodeAt(this.at) : -1;
  }

  private skipSpace(): void {
    this.at += this.match(SPACE).length;
  }

  private match(pattern: RegExp): string {
    pattern.lastIndex = this.at;
    return pattern.exec(this.text)?.[0] ?? '';
  }
}
