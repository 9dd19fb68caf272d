import { encodeText } from '../../core/text.ts';

/** Characters gathered before they become bytes. */
const BLOCK = 1 << 16;

/** Gathers text into bytes block by block, so that a large file is never one string. */
export class TextWriter {
  readonly #blocks: Uint8Array[] = [];
  #size = 0;
  #text = '';

  add(text: string): void {
    this.#text += text;
    if (this.#text.length >= BLOCK) this.#flush();
  }

  /** All that was added, as UTF-8; the writer is empty afterwards. */
  bytes(): Uint8Array {
    this.#flush();
    const all = new Uint8Array(this.#size);
    let at = 0;
    for (const block of this.#blocks) {
      all.set(block, at);
      at += block.length;
    }
    this.#blocks.length = 0;
    this.#size = 0;
    return all;
  }

  #flush(): void {
    if (this.#text === '') return;
    const block = encodeText(this.#text);
    this.#blocks.push(block);
    this.#size += block.length;
    this.#text = '';
  }
}
