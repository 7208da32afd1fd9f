/**
 * The recent midlines: a ring of fixed size, sideways displacement per point, and the hub time of each.
 * Nothing is allocated after construction; the oldest entry is overwritten.
 */

/** Eight seconds at 60 frames a second, rounded up to a power of two. */
export const PAST_CAPACITY = 512;

export class PastMidlines {
  readonly pointCount: number;
  /** Entries ever written since the last clear: entry `n` lives in slot `n % PAST_CAPACITY` while `n >= total - size`. */
  total = 0;
  readonly #sideways: Float32Array;
  readonly #times = new Float64Array(PAST_CAPACITY);

  constructor(pointCount: number) {
    this.pointCount = pointCount;
    this.#sideways = new Float32Array(PAST_CAPACITY * pointCount);
  }

  /** Entries that can be read. */
  get size(): number {
    return Math.min(this.total, PAST_CAPACITY);
  }

  /** Hub time of the newest entry, s; NaN when empty. */
  get newestS(): number {
    return this.total === 0 ? Number.NaN : this.timeS(this.total - 1);
  }

  clear(): void {
    this.total = 0;
  }

  /**
   * @param hubTimeS of the midline
   * @param midline x, y, z per point, m
   */
  push(hubTimeS: number, midline: Float32Array): void {
    const slot = this.total % PAST_CAPACITY;
    const base = slot * this.pointCount;
    for (let i = 0; i < this.pointCount; i++) {
      this.#sideways[base + i] = midline[3 * i + 1];
    }
    this.#times[slot] = hubTimeS;
    this.total++;
  }

  timeS(entry: number): number {
    return this.#times[entry % PAST_CAPACITY];
  }

  /** Displacement to the left, m. */
  sideways(entry: number, point: number): number {
    return this.#sideways[(entry % PAST_CAPACITY) * this.pointCount + point];
  }

  /** The oldest entry not before `timeS`; `total` when all are older. */
  firstSince(timeS: number): number {
    let entry = this.total;
    const oldest = this.total - this.size;
    while (entry > oldest && this.timeS(entry - 1) >= timeS) entry--;
    return entry;
  }
}
