/**
 * The travel axis: the horizontal direction the body points on average, so that a view from above has the nose ahead
 * and lateral excursions are measured across it.
 *
 * The chord from tail tip to nose swings with every tailbeat; its mean over whole beats does not. While the body beats
 * the mean is taken over the last whole beats (at least LEAST_WINDOW_S of them), otherwise over RESTING_WINDOW_S, and at
 * first over what there is. So the swing cancels out, and a body that turns is followed with a lag of half the window.
 *
 * Chords are averaged as vectors, not as angles, so there is no jump at +-180 deg. A body that hangs steeply has no
 * direction of travel: while the mean chord is level by less than STEEP_SHARE of its length, the last axis stays.
 */

/** Short enough to follow a turn, long enough that a rattle taken for a beat does not swing the view, s. */
const LEAST_WINDOW_S = 0.75;
const RESTING_WINDOW_S = 2;
/** Beats slower than this are not waited for, s. */
const LONGEST_WINDOW_S = 5;
/** About 73 deg of pitch: steeper than a body swims, and level enough still to tell a direction. */
const STEEP_SHARE = 0.3;

export class TravelAxis {
  // Ring of the last LONGEST_WINDOW_S: time and the chord's integral since the start, one entry a sweep.
  readonly #timeS: Float64Array;
  readonly #sumX: Float64Array;
  readonly #sumY: Float64Array;
  /** Sweeps taken; the newest entry is #count - 1. */
  #count = 0;
  /** Last entry at or before the window's start: it moves either way as the window does. */
  #start = 0;
  #firstStepS = 0;
  /** East and north share of the axis's unit vector; east until the first sweep. Borrowed. */
  readonly direction = new Float64Array([1, 0]);

  /** @param rateHz sweeps a second, nominal: how many the longest window may hold */
  constructor(rateHz: number) {
    const entries = Math.ceil(rateHz * LONGEST_WINDOW_S * 1.5) + 2;
    this.#timeS = new Float64Array(entries);
    this.#sumX = new Float64Array(entries);
    this.#sumY = new Float64Array(entries);
  }

  /** rad from east, anticlockwise; 0 (east) until the first sweep. */
  get heading(): number {
    return Math.atan2(this.direction[1], this.direction[0]);
  }

  /**
   * Takes one sweep's midline into the mean.
   * @param stepS time since the sweep before, s
   * @param positions 3 per point, earth axes, m, nose first
   * @param periodS of the tailbeat; null while the body does not beat
   */
  step(stepS: number, positions: Float64Array, periodS: number | null): void {
    const tail = positions.length - 3;
    const chordX = positions[0] - positions[tail];
    const chordY = positions[1] - positions[tail + 1];
    const chordZ = positions[2] - positions[tail + 2];
    const chord = Math.sqrt(chordX * chordX + chordY * chordY + chordZ * chordZ);
    const entries = this.#timeS.length;
    const newest = this.#count % entries;
    const before = (this.#count + entries - 1) % entries;
    const first = this.#count === 0;
    if (first) this.#firstStepS = stepS;
    this.#timeS[newest] = first ? 0 : this.#timeS[before] + stepS;
    this.#sumX[newest] = (first ? 0 : this.#sumX[before]) + stepS * chordX;
    this.#sumY[newest] = (first ? 0 : this.#sumY[before]) + stepS * chordY;
    this.#count++;
    this.#pointAlongMean(newest, windowFor(periodS), chord);
  }

  #pointAlongMean(newest: number, windowS: number, chord: number): void {
    const entries = this.#timeS.length;
    const startS = this.#timeS[newest] - windowS;
    const oldest = Math.max(0, this.#count - entries);
    let start = Math.max(this.#start, oldest);
    while (start > oldest && this.#timeS[start % entries] > startS) start--;
    while (start + 1 < this.#count && this.#timeS[(start + 1) % entries] <= startS) start++;
    this.#start = start;
    let spanS = this.#timeS[newest] + this.#firstStepS;
    let sumX = this.#sumX[newest];
    let sumY = this.#sumY[newest];
    const at = start % entries;
    if (this.#timeS[at] <= startS && start + 1 < this.#count) {
      // The integral at the window's start, between two sweeps.
      const next = (start + 1) % entries;
      const share = (startS - this.#timeS[at]) / (this.#timeS[next] - this.#timeS[at]);
      spanS = windowS;
      sumX -= this.#sumX[at] + share * (this.#sumX[next] - this.#sumX[at]);
      sumY -= this.#sumY[at] + share * (this.#sumY[next] - this.#sumY[at]);
    } else if (oldest > 0) {
      spanS = this.#timeS[newest] - this.#timeS[at];
      sumX -= this.#sumX[at];
      sumY -= this.#sumY[at];
    }
    const length = Math.sqrt(sumX * sumX + sumY * sumY);
    if (!(length > STEEP_SHARE * chord * spanS)) return;
    this.direction[0] = sumX / length;
    this.direction[1] = sumY / length;
  }

  /**
   * Turns earth axes into travel axes (x along the travel axis, y left, z up; same origin).
   * @param positions 3 per point, m
   * @param out as many numbers, m; may be `positions` itself
   */
  toTravelAxes(positions: Float64Array, out: Float32Array | Float64Array): void {
    for (let i = 0; i < positions.length; i += 3) {
      const x = positions[i];
      const y = positions[i + 1];
      out[i] = this.direction[0] * x + this.direction[1] * y;
      out[i + 1] = this.direction[0] * y - this.direction[1] * x;
      out[i + 2] = positions[i + 2];
    }
  }

  /** Excursion of one point to the left of the travel axis through the nose, m. */
  lateral(positions: Float64Array, point: number): number {
    return this.direction[0] * positions[3 * point + 1] - this.direction[1] * positions[3 * point];
  }
}

/** The least number of whole beats that lasts long enough, s. */
function windowFor(periodS: number | null): number {
  if (periodS === null) return RESTING_WINDOW_S;
  return Math.min(Math.ceil(LEAST_WINDOW_S / periodS) * periodS, LONGEST_WINDOW_S);
}
