/** A Float64Array that grows as numbers are added. */
export class GrowingNumbers {
  #values = new Float64Array(64);
  length = 0;

  push(value: number): void {
    if (this.length === this.#values.length) {
      const larger = new Float64Array(this.#values.length * 2);
      larger.set(this.#values);
      this.#values = larger;
    }
    this.#values[this.length] = value;
    this.length += 1;
  }

  /** The numbers so far, without a copy: good until the next `push`. */
  view(): Float64Array {
    return this.#values.subarray(0, this.length);
  }
}
