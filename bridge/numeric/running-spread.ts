/**
 * Mean and standard deviation of numbers as they come: B. P. Welford, Technometrics 4 (1962) 419; two of them are joined
 * after T. F. Chan, G. H. Golub and R. J. LeVeque, COMPSTAT 1982, 30.
 */
export class RunningSpread {
  #count = 0;
  #mean = 0;
  #squares = 0;

  /** Takes a number in; not-a-number is passed over. */
  add(value: number): void {
    if (Number.isNaN(value)) return;
    this.#count++;
    const off = value - this.#mean;
    this.#mean += off / this.#count;
    this.#squares += off * (value - this.#mean);
  }

  /** Takes in all that `other` has taken in. */
  merge(other: RunningSpread): void {
    if (other.#count === 0) return;
    const count = this.#count + other.#count;
    const off = other.#mean - this.#mean;
    this.#squares += other.#squares + (off * off * this.#count * other.#count) / count;
    this.#mean += (off * other.#count) / count;
    this.#count = count;
  }

  get count(): number {
    return this.#count;
  }

  /** NaN of nothing. */
  get mean(): number {
    return this.#count === 0 ? Number.NaN : this.#mean;
  }

  /** Of the population the numbers are a sample of; NaN of fewer than two. */
  get deviation(): number {
    return this.#count < 2 ? Number.NaN : Math.sqrt(this.#squares / (this.#count - 1));
  }

  /** Coefficient of variation: the deviation as a share of the mean's size. */
  get variation(): number {
    return this.deviation / Math.abs(this.mean);
  }
}
