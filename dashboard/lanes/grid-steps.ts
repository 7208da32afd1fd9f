/** Round numbers for axes, and a range that follows what is shown without fidgeting. */

const HALF_RANGES = [1, 1.5, 2, 3, 4, 5, 6, 8, 10];
const STEPS = [1, 2, 5, 10];
/** Room above the highest peak. */
const MARGIN = 1.06;
/** A smaller range is taken when it would have sufficed for so long, s. */
const SHRINK_AFTER_S = 6;

/** The smallest of `choices` times a power of ten that is not below `value` (positive). */
function roundUp(value: number, choices: readonly number[]): number {
  const power = 10 ** Math.floor(Math.log10(value));
  const found = choices.find((choice) => choice * power >= value * (1 - 1e-9));
  return (found ?? 10) * power;
}

/** Distance between grid lines: 1, 2 or 5 times a power of ten, at least `least`. */
export function gridStep(least: number): number {
  return roundUp(least, STEPS);
}

/** Half of a range that is symmetric about zero and holds `peak`. */
export function halfRange(peak: number): number {
  return roundUp(peak * MARGIN, HALF_RANGES);
}

/** A symmetric range that grows at once and shrinks only when it has been too large for several seconds. */
export class CalmRange {
  /** Half of the range, in the unit of the peaks; 0 until the first. */
  half = 0;
  #recentPeak = 0;
  #recentSinceS = Number.NaN;

  reset(): void {
    this.half = 0;
    this.#recentPeak = 0;
    this.#recentSinceS = Number.NaN;
  }

  /**
   * @param peak largest magnitude now shown; must be positive
   * @param timeS now
   * @returns whether the range changed
   */
  update(peak: number, timeS: number): boolean {
    const before = this.half;
    this.#recentPeak = Math.max(this.#recentPeak, peak);
    if (Number.isNaN(this.#recentSinceS)) this.#recentSinceS = timeS;
    if (peak > this.half) this.half = halfRange(peak);
    else if (timeS - this.#recentSinceS > SHRINK_AFTER_S) {
      this.half = halfRange(this.#recentPeak);
      this.#recentPeak = peak;
      this.#recentSinceS = timeS;
    }
    return this.half !== before;
  }
}
