/**
 * The midline at each camera frame: frame pulses fall between sweeps, so it is the cubic through the two sweeps before the
 * pulse and the two after.
 */
import { cubicWeights } from "../../numeric/cubic.ts";

/** Sweeps further apart than this many nominal intervals have lost too much between them. */
const WIDEST_GAP = 3.5;
const SWEEPS = 4;

interface Frame {
  readonly timeS: number;
  readonly edge: number;
}

export class FrameMidlines {
  readonly #onFrame: (timeS: number, edge: number, midlineM: Float64Array | null) => void;
  readonly #widestS: number;
  readonly #times = new Float64Array(SWEEPS);
  /** Of the last sweeps, oldest first. */
  readonly #midlines: Float64Array[];
  readonly #weights = new Float64Array(SWEEPS);
  readonly #out: Float64Array;
  #sweeps = 0;
  #waiting: Frame[] = [];

  /**
   * @param numbers of a midline
   * @param onFrame told each frame's midline, borrowed; null where no sweeps are around the frame
   */
  constructor(
    rateHz: number,
    numbers: number,
    onFrame: (timeS: number, edge: number, midlineM: Float64Array | null) => void,
  ) {
    this.#widestS = WIDEST_GAP / rateHz;
    this.#midlines = Array.from({ length: SWEEPS }, () => new Float64Array(numbers));
    this.#out = new Float64Array(numbers);
    this.#onFrame = onFrame;
  }

  sync(timeS: number, edge: number): void {
    this.#waiting.push({ timeS, edge });
  }

  /** @param timeS increasing; @param midlineM any numbers, the same ones each sweep */
  sweep(timeS: number, midlineM: Float64Array): void {
    this.#times.copyWithin(0, 1);
    this.#times[SWEEPS - 1] = timeS;
    const oldest = this.#midlines.shift()!;
    oldest.set(midlineM);
    this.#midlines.push(oldest);
    this.#sweeps++;
    if (this.#sweeps >= SWEEPS) this.#release(this.#times[SWEEPS - 2]);
  }

  /** No more sweeps come. */
  finish(): void {
    this.#release(Number.POSITIVE_INFINITY);
  }

  #release(untilS: number): void {
    while (this.#waiting.length > 0 && this.#waiting[0].timeS <= untilS) {
      const { timeS, edge } = this.#waiting.shift()!;
      this.#onFrame(timeS, edge, this.#at(timeS) ? this.#out : null);
    }
  }

  /** Leaves in #out the midline at a time among the last sweeps; false where it is not among them. */
  #at(timeS: number): boolean {
    const times = this.#times;
    if (this.#sweeps < SWEEPS || timeS < times[0] || timeS > times[SWEEPS - 1]) return false;
    let next = 1;
    while (times[next] < timeS) next++;
    if (times[next] - times[next - 1] > this.#widestS) return false;
    cubicWeights(this.#weights, timeS, times);
    this.#out.fill(0);
    this.#midlines.forEach((midline, k) => {
      for (let i = 0; i < midline.length; i++) this.#out[i] += this.#weights[k] * midline[i];
    });
    return true;
  }
}
