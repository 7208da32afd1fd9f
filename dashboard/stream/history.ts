/**
 * The recent past of the midline: the last few seconds of frames as flat typed arrays, oldest overwritten. Feeds the past
 * positions, the envelope and the body wave. No allocation after it is made.
 */

/** At 60 frames a second, over eight seconds: two of the slowest beats shown. */
export const HISTORY_FRAMES = 512;

export class History {
  readonly pointCount: number;
  /** Frames added since the start; the newest is count - 1, the oldest kept max(0, count - HISTORY_FRAMES). */
  count = 0;
  readonly #timeS = new Float64Array(HISTORY_FRAMES);
  /** Excursion to the left, m; one row of pointCount a frame. */
  readonly #lateral: Float32Array;

  constructor(pointCount: number) {
    this.pointCount = pointCount;
    this.#lateral = new Float32Array(HISTORY_FRAMES * pointCount);
  }

  /** @param midline x,y,z per point, travel axes, m */
  add(timeS: number, midline: Float32Array): void {
    const slot = this.count % HISTORY_FRAMES;
    this.#timeS[slot] = timeS;
    const row = slot * this.pointCount;
    for (let point = 0; point < this.pointCount; point++) {
      this.#lateral[row + point] = midline[3 * point + 1]!;
    }
    this.count++;
  }

  get oldest(): number {
    return Math.max(0, this.count - HISTORY_FRAMES);
  }

  timeS(index: number): number {
    return this.#timeS[index % HISTORY_FRAMES]!;
  }

  lateral(index: number, point: number): number {
    return this.#lateral[(index % HISTORY_FRAMES) * this.pointCount + point]!;
  }

  /** Index of the first kept frame at or after `timeS`; count when there is none. */
  firstAtOrAfter(timeS: number): number {
    let low = this.oldest;
    let high = this.count;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.timeS(middle) < timeS) low = middle + 1;
      else high = middle;
    }
    return low;
  }

  /** Least and greatest excursion of every point since `sinceS`, m. @returns false when no frame is that young */
  envelope(sinceS: number, low: Float32Array, high: Float32Array): boolean {
    const first = this.firstAtOrAfter(sinceS);
    if (first >= this.count) return false;
    low.fill(Number.POSITIVE_INFINITY);
    high.fill(Number.NEGATIVE_INFINITY);
    for (let index = first; index < this.count; index++) {
      const row = (index % HISTORY_FRAMES) * this.pointCount;
      for (let point = 0; point < this.pointCount; point++) {
        const value = this.#lateral[row + point]!;
        if (value < low[point]!) low[point] = value;
        if (value > high[point]!) high[point] = value;
      }
    }
    return true;
  }
}
