/** A running sum that keeps what each addition rounds away (Neumaier's variant of Kahan's; from memory). */
export class ExactSum {
  #sum = 0;
  #lost = 0;

  add(value: number): void {
    const next = this.#sum + value;
    this.#lost += Math.abs(this.#sum) >= Math.abs(value) ? this.#sum - next + value : value - next + this.#sum;
    this.#sum = next;
  }

  get total(): number {
    return this.#sum + this.#lost;
  }
}
