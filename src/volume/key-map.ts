/** Numbers under keys of three whole numbers ≥ 0 (two, with the third 0); emptied in no time. */
export class KeyMap {
  private key = new Int32Array(3 * 1024);
  private value = new Int32Array(1024);
  /** Round in which a slot was last filled. */
  private filled = new Int32Array(1024);
  private round = 1;
  private count = 0;

  clear(): void {
    this.round++;
    this.count = 0;
  }

  /** Puts a value under a key that is not there. */
  add(a: number, b: number, c: number, value: number): void {
    if (2 * ++this.count > this.value.length) this.widen();
    const slot = this.find(a, b, c);
    this.filled[slot] = this.round;
    this.key[3 * slot] = a;
    this.key[3 * slot + 1] = b;
    this.key[3 * slot + 2] = c;
    this.value[slot] = value;
  }

  /** The value under a key, or −1. */
  get(a: number, b: number, c: number): number {
    const slot = this.find(a, b, c);
    return this.filled[slot] === this.round ? this.value[slot]! : -1;
  }

  /** The value under the three numbers in any order that the same three were added in by `addFace`. */
  getFace(a: number, b: number, c: number): number {
    const low = Math.min(a, b, c);
    const high = Math.max(a, b, c);
    return this.get(low, a + b + c - low - high, high);
  }

  addFace(a: number, b: number, c: number, value: number): void {
    const low = Math.min(a, b, c);
    const high = Math.max(a, b, c);
    this.add(low, a + b + c - low - high, high, value);
  }

  private find(a: number, b: number, c: number): number {
    const mask = this.value.length - 1;
    let h = (Math.imul(a, 0x9e3779b1) ^ Math.imul(b, 0x85ebca6b) ^ Math.imul(c, 0xc2b2ae35)) >>> 0;
    h = (h ^ (h >>> 15)) & mask;
    while (this.filled[h] === this.round) {
      if (this.key[3 * h] === a && this.key[3 * h + 1] === b && this.key[3 * h + 2] === c) return h;
      h = (h + 1) & mask;
    }
    return h;
  }

  private widen(): void {
    const { key, value, filled, round } = this;
    const old = value.length;
    this.key = new Int32Array(6 * old);
    this.value = new Int32Array(2 * old);
    this.filled = new Int32Array(2 * old);
    this.round = 1;
    for (let i = 0; i < old; i++) {
      if (filled[i] !== round) continue;
      const slot = this.find(key[3 * i]!, key[3 * i + 1]!, key[3 * i + 2]!);
      this.filled[slot] = 1;
      this.key.set(key.subarray(3 * i, 3 * i + 3), 3 * slot);
      this.value[slot] = value[i]!;
    }
  }
}
