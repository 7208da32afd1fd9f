/**
 * How fast the hub's clock runs against the host's, in parts per million. For display and its flag: nothing is computed from it.
 *
 * Arrivals are delayed by varying amounts, never early, so of the offsets host - hub only the lowest tell the clocks
 * apart. Method: hub time is cut into blocks, each keeps its least offset, and the drift is the slope of the line that lies
 * under all of these and is nearest to them in total; that line is the edge of their lower convex hull above which their
 * mean time lies. It is the estimate of Moon, Skelly & Towsley, "Estimation and removal of clock skew from network delay
 * measurements", INFOCOM 1999 (a linear programme there; solved by the hull as in Zhang, Liu & Xia, INFOCOM 2002). Both
 * cited from memory.
 *
 * Memory: BLOCKS blocks, ten minutes; the oldest is overwritten. Arrivals are stamped to 1 ms, so one minute resolves
 * about 1 ms / 60 s = 17 ppm, ten minutes about 2 ppm.
 */
const BLOCK_S = 5;
const BLOCKS = 120;
/** Complete blocks before there is a figure: one minute. */
const LEAST_BLOCKS = 12;
/** Offsets of two blocks further apart than this are a host clock that was set, or a hub that restarted. */
const STEP_MS = 1000;

export class DriftMeter {
  /** Of complete blocks, a ring: hub time (s) and offset (ms) of the least delayed arrival. */
  readonly #timesS = new Float64Array(BLOCKS);
  readonly #offsetsMs = new Float64Array(BLOCKS);
  /** Corners of the lower hull, as places in the ring, oldest first. */
  readonly #hull = new Int32Array(BLOCKS);
  /** Blocks completed since the start. */
  #blocks = 0;
  #blockEndS = Number.NaN;
  #leastMs = Number.POSITIVE_INFINITY;
  #leastAtS = 0;
  #ppm: number | null = null;

  /** Positive: the hub's clock is fast. null until a minute has been seen. */
  get ppm(): number | null {
    return this.#ppm;
  }

  /** An arrival. Allocates nothing. @param hubTimeS increasing @param hostTimeMs arrival on the host clock, ms */
  observe(hubTimeS: number, hostTimeMs: number): void {
    if (!(hubTimeS < this.#blockEndS)) {
      if (this.#leastMs < Number.POSITIVE_INFINITY) this.#completeBlock();
      this.#leastMs = Number.POSITIVE_INFINITY;
      this.#blockEndS = hubTimeS + BLOCK_S;
    }
    const offsetMs = hostTimeMs - hubTimeS * 1000;
    if (offsetMs >= this.#leastMs) return;
    this.#leastMs = offsetMs;
    this.#leastAtS = hubTimeS;
  }

  #completeBlock(): void {
    const before = this.#offsetsMs[(this.#blocks - 1) % BLOCKS];
    if (this.#blocks > 0 && Math.abs(this.#leastMs - before!) > STEP_MS) {
      this.#blocks = 0;
      this.#ppm = null;
    }
    this.#timesS[this.#blocks % BLOCKS] = this.#leastAtS;
    this.#offsetsMs[this.#blocks % BLOCKS] = this.#leastMs;
    this.#blocks++;
    if (this.#blocks >= LEAST_BLOCKS) this.#ppm = -1000 * this.#slopeUnder();
  }

  /** Slope of the line under all blocks and nearest to them, ms per s. */
  #slopeUnder(): number {
    const held = Math.min(this.#blocks, BLOCKS);
    const hull = this.#hull;
    let corners = 0;
    let sumS = 0;
    for (let b = this.#blocks - held; b < this.#blocks; b++) {
      const place = b % BLOCKS;
      sumS += this.#timesS[place]!;
      while (corners >= 2 && !this.#turnsUp(hull[corners - 2]!, hull[corners - 1]!, place)) corners--;
      hull[corners++] = place;
    }
    let edge = 1;
    while (edge < corners - 1 && this.#timesS[hull[edge]!]! < sumS / held) edge++;
    return this.#slope(hull[edge - 1]!, hull[edge]!);
  }

  #turnsUp(a: number, b: number, c: number): boolean {
    return this.#slope(a, b) < this.#slope(b, c);
  }

  #slope(a: number, b: number): number {
    return (this.#offsetsMs[b]! - this.#offsetsMs[a]!) / (this.#timesS[b]! - this.#timesS[a]!);
  }
}
