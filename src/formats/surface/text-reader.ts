import { type InputError, inputError } from '../../core/errors.ts';

/** A number as text files write it; leaves out hexadecimal, `Infinity` and the empty word, which `Number` would take. */
const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const INTEGER = /^[+-]?\d{1,15}$/;
/** Words are read no longer than this; garbage has words of megabytes. */
const LONGEST = 400;

/** Reads words from bytes and knows the line it is on. */
export class TextReader {
  readonly bytes: Uint8Array;
  readonly file: string;
  /** Offset of the next byte. */
  at: number;
  /** Line of the next byte, from 1. */
  line = 1;

  constructor(bytes: Uint8Array, file: string, at = 0) {
    this.bytes = bytes;
    this.file = file;
    this.at = at;
  }

  /** The next word of any line, or '' at the end of the file. */
  word(): string {
    while (this.at < this.bytes.length && this.bytes[this.at]! <= 32) {
      if (this.bytes[this.at] === 10) this.line++;
      this.at++;
    }
    return this.take();
  }

  /** The next word of this line, or '' at its end. */
  wordOfLine(): string {
    while (this.at < this.bytes.length && this.bytes[this.at]! <= 32 && this.bytes[this.at] !== 10) this.at++;
    return this.bytes[this.at] === 10 ? '' : this.take();
  }

  /** Skips what is left of this line and its end. */
  skipLine(): void {
    const end = this.bytes.indexOf(10, this.at);
    this.at = end < 0 ? this.bytes.length : end + 1;
    if (end >= 0) this.line++;
  }

  get ended(): boolean {
    return this.at >= this.bytes.length;
  }

  /** A finite number from a word. */
  real(word: string, what: string): number {
    const value = Number(word);
    if (Number.isFinite(value) && NUMBER.test(word)) return value;
    if (word === '') throw this.fault('truncated', `got nothing, expected ${what}`);
    if (/^[+-]?(nan|inf)/i.test(word) || NUMBER.test(word))
      throw this.fault('non-finite', `got ${quoted(word)}, expected a finite number for ${what}`);
    throw this.fault('bad-number', `got ${quoted(word)}, expected a number for ${what}`);
  }

  /** A whole number from a word. */
  integer(word: string, what: string): number {
    if (INTEGER.test(word)) return Number(word);
    if (word === '') throw this.fault('truncated', `got nothing, expected ${what}`);
    throw this.fault('bad-number', `got ${quoted(word)}, expected a whole number for ${what}`);
  }

  fault(code: string, message: string): InputError {
    return inputError(code, `${this.file}:${this.line}`, message);
  }

  private take(): string {
    const start = this.at;
    let end = start;
    while (end < this.bytes.length && this.bytes[end]! > 32) end++;
    this.at = end;
    return textOf(this.bytes, start, Math.min(end, start + LONGEST));
  }
}

/** Bytes as characters of the same code; enough for keywords and numbers. */
export function textOf(bytes: Uint8Array, start: number, end: number): string {
  let out = '';
  for (let i = start; i < end; i++) out += String.fromCharCode(bytes[i]!);
  return out;
}

/** A word fit for a message: printable and short. */
export function quoted(word: string): string {
  const clean = word.replace(/[^\x20-\x7e]/g, '?');
  return `"${clean.length > 40 ? `${clean.slice(0, 40)}…` : clean}"`;
}
