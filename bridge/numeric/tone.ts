/**
 * The strongest tone in evenly spaced readings of three channels: a discrete Fourier transform with Hann's window, the
 * frequency between two lines from their ratio (T. Grandke, IEEE Trans. Instrum. Meas. 32 (1983) 350). Names what else
 * would look the same once sampled.
 */

/** Share of the power above the lowest frequency that lies in the tone's three lines: half, where one tone stands out. */
const TONAL_SHARE = 0.5;

export class ToneFinder {
  /** Readings in a window. */
  readonly size: number;
  /** Of the last window that `find` found a tone in: peak value, and frequency in cycles a reading, 0 to 1/2. */
  amplitude = 0;
  frequency = 0;
  readonly #cosine: Float64Array;
  readonly #window: Float64Array;
  readonly #power: Float64Array;

  constructor(size: number) {
    this.size = size;
    this.#cosine = Float64Array.from({ length: size }, (_, n) => Math.cos((2 * Math.PI * n) / size));
    this.#window = Float64Array.from(this.#cosine, (c) => (1 - c) / 2);
    this.#power = new Float64Array(size / 2 + 1);
  }

  /**
   * @param readings three channels of a ring of `size`, one after the other
   * @param start place of the oldest reading in the ring
   * @param lowest frequency, cycles a reading: what is slower is left out
   * @returns true when one tone stands out
   */
  find(readings: Float64Array, start: number, lowest: number): boolean {
    const { size } = this;
    this.#power.fill(0);
    for (let channel = 0; channel < 3; channel++) this.#add(readings, channel * size, start);
    const first = Math.max(1, Math.ceil(lowest * size));
    const last = size / 2;
    let peak = first;
    let total = 0;
    for (let k = first; k <= last; k++) {
      total += this.#power[k]!;
      if (this.#power[k]! > this.#power[peak]!) peak = k;
    }
    const below = this.#power[peak - 1]!;
    const above = peak < last ? this.#power[peak + 1]! : below;
    // Rising towards what is left out: the tail of something slow.
    if (first > last || below > this.#power[peak]! || total === 0) return false;
    const lobe = this.#power[peak]! + (peak > first ? below : 0) + (peak < last ? above : 0);
    if (lobe < TONAL_SHARE * total) return false;
    const ratio = Math.sqrt(Math.max(below, above) / this.#power[peak]!);
    const shift = ((2 * ratio - 1) / (ratio + 1)) * (above > below ? 1 : above < below ? -1 : 0);
    this.frequency = Math.min(0.5, (peak + shift) / size);
    // The window sums to half its size; a line between zero and half the rate has its mirror image.
    this.amplitude = (Math.sqrt(this.#power[peak]!) * (peak === last ? 2 : 4)) / size;
    return true;
  }

  #add(readings: Float64Array, at: number, start: number): void {
    const { size } = this;
    const mask = size - 1;
    let mean = 0;
    for (let n = 0; n < size; n++) mean += readings[at + n]! / size;
    for (let k = 1; k <= size / 2; k++) {
      let real = 0;
      let imaginary = 0;
      for (let n = 0; n < size; n++) {
        const value = (readings[at + ((start + n) & mask)]! - mean) * this.#window[n]!;
        real += value * this.#cosine[(k * n) & mask]!;
        imaginary += value * this.#cosine[(k * n + 3 * (size >> 2)) & mask]!;
      }
      this.#power[k]! += real * real + imaginary * imaginary;
    }
  }
}

/** What a frequency looks like once sampled `rateHz` times a second: between 0 and half of that. */
export function foldedHz(frequencyHz: number, rateHz: number): number {
  return Math.abs(frequencyHz - rateHz * Math.round(frequencyHz / rateHz));
}
