/**
 * The true midline of a swimming body at one moment of its wave, at unit length.
 *
 * Published envelopes give the lateral position over the distance along the travel axis:
 *
 *     y(x, phase) = a(x) sin(phase - 2 pi x / wavelength),  x from 0 at the nose to 1
 *
 * That curve is longer than 1, and not equally so at every moment. A body does not stretch: the curve is scaled at each
 * moment so that its own length is 1, and places on it are counted by arc length. (A rehearsal takes the same envelope
 * over arc length instead, so its body bends somewhat more.)
 */
import type { Gait } from "../numeric/gaits.ts";

/** Pieces along the travel axis. Within one, arc length is taken for linear: places are then off by less than 1e-5. */
const PIECES = 512;

export class SwimmingBody {
  readonly #gait: Gait;
  readonly #phase: number;
  /** Arc length from the nose to the end of each piece, before scaling. */
  readonly #arcs = new Float64Array(PIECES + 1);

  /** @param phase of the wave at the nose, rad */
  constructor(gait: Gait, phase: number) {
    this.#gait = gait;
    this.#phase = phase;
    for (let i = 0; i < PIECES; i++) {
      // Simpson's rule over each piece.
      const [first, middle, last] = [i, i + 0.5, i + 1].map((at) => Math.hypot(1, this.#slope(at / PIECES)));
      this.#arcs[i + 1] = this.#arcs[i] + (first + 4 * middle + last) / (6 * PIECES);
    }
  }

  /** Angle of the body's x axis from the travel axis at a station (0 nose, 1 tail tip by arc length), rad, positive left. */
  angle(station: number): number {
    return -Math.atan(this.#slope(this.#along(station)));
  }

  /** Place of a station: behind the nose (negative forward axis) and left of it, as shares of body length. */
  position(station: number): { readonly x: number; readonly y: number } {
    const along = this.#along(station);
    const scale = 1 / this.#arcs[PIECES];
    return { x: -along * scale, y: (this.#lateral(along) - this.#lateral(0)) * scale };
  }

  /** How far the nose is left of the travel axis, as a share of body length. */
  get noseLateral(): number {
    return this.#lateral(0) / this.#arcs[PIECES];
  }

  /** Distance along the travel axis, before scaling, at which the body has so much of its length in front of it. */
  #along(station: number): number {
    const arcs = this.#arcs;
    const arc = station * arcs[PIECES];
    let piece = 0;
    for (let step = PIECES / 2; step >= 1; step /= 2) if (arcs[piece + step] <= arc) piece += step;
    if (piece === PIECES) return 1;
    return (piece + (arc - arcs[piece]) / (arcs[piece + 1] - arcs[piece])) / PIECES;
  }

  #lateral(x: number): number {
    return this.#gait.amplitude(x) * Math.sin(this.#wave(x));
  }

  #slope(x: number): number {
    const wave = this.#wave(x);
    const k = (2 * Math.PI) / this.#gait.wavelength;
    return this.#gait.slope(x) * Math.sin(wave) - k * this.#gait.amplitude(x) * Math.cos(wave);
  }

  #wave(x: number): number {
    return this.#phase - (2 * Math.PI * x) / this.#gait.wavelength;
  }
}
