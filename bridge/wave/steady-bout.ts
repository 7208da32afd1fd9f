/** Counts beats in a row that agree with each other: the steady bout under way. */

/** Beats are steady while each frequency stays within this share of the bout's mean ... (common practice, no source) */
export const STEADY_FREQUENCY_SHARE = 0.05;
/** ... and each amplitude within this share; wider, since amplitude varies more from beat to beat (likewise). */
export const STEADY_AMPLITUDE_SHARE = 0.1;

export class SteadyBout {
  #beats = 0;
  #frequencySum = 0;
  #amplitudeSum = 0;

  /** Beats in the bout; one beat alone agrees with itself. */
  get beats(): number {
    return this.#beats;
  }

  /** Takes a beat into the bout, or starts a new bout with it when it lies too far from the mean of both. */
  add(frequencyHz: number, amplitudeM: number): void {
    const beats = this.#beats + 1;
    const frequencySum = this.#frequencySum + frequencyHz;
    const amplitudeSum = this.#amplitudeSum + amplitudeM;
    const frequency = frequencySum / beats;
    const amplitude = amplitudeSum / beats;
    const agrees =
      Math.abs(frequencyHz - frequency) <= STEADY_FREQUENCY_SHARE * frequency &&
      Math.abs(amplitudeM - amplitude) <= STEADY_AMPLITUDE_SHARE * amplitude;
    this.#beats = agrees ? beats : 1;
    this.#frequencySum = agrees ? frequencySum : frequencyHz;
    this.#amplitudeSum = agrees ? amplitudeSum : amplitudeM;
  }

  /** The body has stopped: the next beat starts a new bout. */
  end(): void {
    this.#beats = 0;
    this.#frequencySum = 0;
    this.#amplitudeSum = 0;
  }
}
