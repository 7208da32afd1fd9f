/**
 * The magnetic field that counts as undisturbed, as its horizontal and downward parts; no heading.
 *
 * The rule: the field measured over the first two seconds that are steady along the rig is the reference, whether or not
 * it is that of the World Magnetic Model: a building's steel bends the field alike for all sensors, and the heading is
 * then held against the bent field. Steady along the rig means that at least half of the sensors vary little and agree
 * with the median of all; a sensor that does not is measured against those that do. Until then nothing is judged.
 * If the field has not been steady for GIVE_UP_S, the site's model serves, and the search goes on; without a site there
 * is no reference yet.
 */
import type { ExpectedField } from "./setup.ts";

/** The first moments belong to the orientation filter, which has to find the vertical. */
const SETTLE_S = 0.5;
const LEARN_S = 2;
const GIVE_UP_S = 10;
/** Fewest readings of a sensor that make a mean. */
const LEAST_READINGS = 10;

export class FieldReference {
  /** µT; NaN while there is no reference. */
  horizontalUT = Number.NaN;
  downUT = Number.NaN;
  normUT = Number.NaN;
  /** The measured field is the reference. */
  learned = false;
  readonly #expected: ExpectedField | null;
  readonly #tolerance: number;
  #startS = Number.NaN;
  #windowS = Number.NaN;
  /** Per sensor: readings, sum of horizontal, of down, and of the squares of both. */
  readonly #sums: Float64Array;

  /** @param tolerance share of the norm within which sensors are steady and agree */
  constructor(sensorCount: number, expected: ExpectedField | null, tolerance: number) {
    this.#expected = expected;
    this.#tolerance = tolerance;
    this.#sums = new Float64Array(sensorCount * 4);
  }

  /** How far the learned field is from the expected one, as a share of the latter's norm; 0 without an expectation. */
  get offExpected(): number {
    if (this.#expected === null || !this.learned) return 0;
    const { normUT, dipRad } = this.#expected;
    const horizontal = this.horizontalUT - normUT * Math.cos(dipRad);
    return Math.hypot(horizontal, this.downUT - normUT * Math.sin(dipRad)) / normUT;
  }

  /** Takes one reading, unless the field is learned already. */
  reading(sensor: number, horizontalUT: number, downUT: number): void {
    if (this.learned) return;
    const at = sensor * 4;
    this.#sums[at]! += 1;
    this.#sums[at + 1]! += horizontalUT;
    this.#sums[at + 2]! += downUT;
    this.#sums[at + 3]! += horizontalUT * horizontalUT + downUT * downUT;
  }

  /** Time passes. @returns true once, when the field has just been learned */
  advance(timeS: number): boolean {
    if (this.learned) return false;
    if (Number.isNaN(this.#startS)) this.#startS = this.#windowS = timeS + SETTLE_S;
    if (timeS < this.#startS) this.#sums.fill(0);
    if (timeS < this.#windowS + LEARN_S) return false;
    this.learned = this.#learn();
    this.#sums.fill(0);
    this.#windowS = timeS;
    if (!this.learned && timeS >= this.#startS + GIVE_UP_S) this.#takeExpected();
    return this.learned;
  }

  #takeExpected(): void {
    if (this.#expected === null) return;
    this.normUT = this.#expected.normUT;
    this.horizontalUT = this.normUT * Math.cos(this.#expected.dipRad);
    this.downUT = this.normUT * Math.sin(this.#expected.dipRad);
  }

  #learn(): boolean {
    const means: { horizontal: number; down: number; spread: number }[] = [];
    for (let at = 0; at < this.#sums.length; at += 4) {
      const count = this.#sums[at]!;
      if (count < LEAST_READINGS) continue;
      const horizontal = this.#sums[at + 1]! / count;
      const down = this.#sums[at + 2]! / count;
      const variance = this.#sums[at + 3]! / count - horizontal * horizontal - down * down;
      means.push({ horizontal, down, spread: Math.sqrt(Math.max(0, variance)) });
    }
    if (means.length === 0) return false;
    const horizontal = median(means.map((m) => m.horizontal));
    const down = median(means.map((m) => m.down));
    const tolerance = this.#tolerance * Math.hypot(horizontal, down);
    const agreeing = means.filter(
      (m) => m.spread < tolerance && Math.hypot(m.horizontal - horizontal, m.down - down) < tolerance,
    );
    if (agreeing.length * 2 < means.length) return false;
    this.horizontalUT = median(agreeing.map((m) => m.horizontal));
    this.downUT = median(agreeing.map((m) => m.down));
    this.normUT = Math.hypot(this.horizontalUT, this.downUT);
    return true;
  }
}

function median(values: number[]): number {
  const sorted = values.sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2;
}
