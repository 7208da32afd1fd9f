/**
 * The travel axis: the horizontal direction the body points on average, so that a view from above has the nose ahead
 * and lateral excursions are measured across it.
 *
 * The chord from tail tip to nose swings with every tailbeat; its slow mean does not. A plain running mean over the
 * first `timeConstantS`, a first-order low pass from then on: the axis is right from the first beat, and an animal that
 * turns is followed with a lag of about the time constant. A beat of frequency f leaves 1 / (2 pi f timeConstantS) of
 * its swing: 4 % at 1 Hz with 4 s.
 *
 * Chords are averaged as vectors, not as angles, so there is no jump at +-180 deg, and a body that hangs steeply (a
 * short horizontal chord) hardly moves the axis.
 */
export class TravelAxis {
  readonly #timeConstantS: number;
  #elapsedS = 0;
  #started = false;
  #meanX = 0;
  #meanY = 0;
  #cos = 1;
  #sin = 0;

  /** @param timeConstantS of the mean; longer than the slowest tailbeat, shorter than a turn worth following */
  constructor(timeConstantS = 4) {
    this.#timeConstantS = timeConstantS;
  }

  /** rad from east, anticlockwise; 0 (east) until the first sweep. */
  get heading(): number {
    return Math.atan2(this.#sin, this.#cos);
  }

  /**
   * Takes one sweep's midline into the mean.
   * @param stepS time since the sweep before, s
   * @param positions 3 per point, earth axes, m, nose first
   */
  step(stepS: number, positions: Float64Array): void {
    const tail = positions.length - 3;
    const chordX = positions[0] - positions[tail];
    const chordY = positions[1] - positions[tail + 1];
    this.#elapsedS += stepS;
    const memoryS = Math.min(this.#elapsedS, this.#timeConstantS);
    const weight = this.#started ? 1 - Math.exp(-stepS / memoryS) : 1;
    this.#started = true;
    this.#meanX += weight * (chordX - this.#meanX);
    this.#meanY += weight * (chordY - this.#meanY);
    const length = Math.hypot(this.#meanX, this.#meanY);
    if (length === 0) return; // no horizontal direction at all: the last one stays
    this.#cos = this.#meanX / length;
    this.#sin = this.#meanY / length;
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
      out[i] = this.#cos * x + this.#sin * y;
      out[i + 1] = this.#cos * y - this.#sin * x;
      out[i + 2] = positions[i + 2];
    }
  }

  /** Excursion of one point to the left of the travel axis through the nose, m. */
  lateral(positions: Float64Array, point: number): number {
    return this.#cos * positions[3 * point + 1] - this.#sin * positions[3 * point];
  }
}
