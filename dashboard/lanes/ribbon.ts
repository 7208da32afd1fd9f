/** The body as a ribbon: a smooth line through the midline's points, given a width that tapers as the body does. */
import type { Graphics } from "pixi.js";
import { taper } from "../../bridge/wire/taper.ts";
import { bodyColour } from "../look/palette.ts";

/** Where pieces begin between the first two points of the midline: close together, for the nose is round. */
const NOSE_PIECES = [0, 0.03, 0.09, 0.18, 0.3, 0.46, 0.7];
/** And between any other two. */
const PIECES = [0, 0.5];
/** Neighbouring pieces overlap by so much, pixels: edges drawn side by side would let the ground shine through. */
const OVERLAP = 0.7;

export class Ribbon {
  #count = 0;
  /** Where each piece begins, counted in points of the midline. */
  #places = new Float64Array(0);
  #xs = new Float64Array(0);
  #ys = new Float64Array(0);
  #halfWidths = new Float64Array(0);
  #colours: number[] = [];
  readonly #quad = [0, 0, 0, 0, 0, 0, 0, 0];

  /** Prepares for a number of points, a body and colours. */
  prepare(
    pointCount: number,
    kind: "animal" | "dummy" | "foil",
    widthCss: number,
    body: readonly number[],
  ): void {
    const last = pointCount - 1;
    const places = [last];
    for (let k = last - 1; k >= 0; k--) {
      places.unshift(...(k === 0 ? NOSE_PIECES : PIECES).map((share) => k + share));
    }
    const count = places.length;
    this.#count = count;
    this.#places = Float64Array.from(places);
    this.#xs = new Float64Array(count);
    this.#ys = new Float64Array(count);
    this.#halfWidths = Float64Array.from(places, (place) =>
      Math.max(place === 0 ? 0.3 : 0.9, (widthCss / 2) * taper(kind, place / last)),
    );
    this.#colours = places.map((place) => bodyColour(body, place / last));
  }

  /**
   * Adds the ribbon to a drawing.
   * @param left and width of the ruler
   * @param ys of the midline's points on the canvas
   */
  draw(into: Graphics, left: number, width: number, ys: Float64Array): void {
    this.#smooth(left, width, ys);
    const quad = this.#quad;
    for (let i = 0; i + 1 < this.#count; i++) {
      this.#edge(i, 0, 0);
      this.#edge(i + 1, 4, i + 2 < this.#count ? OVERLAP : 0);
      into.poly(quad.slice(), true).fill(this.#colours[i]);
    }
  }

  /** Catmull-Rom through the points: passes each of them, no corner at any; straight on past either end. */
  #smooth(left: number, width: number, ys: Float64Array): void {
    const last = ys.length - 1;
    for (let i = 0; i < this.#count; i++) {
      const place = this.#places[i];
      const k = Math.min(Math.floor(place), last - 1);
      const t = place - k;
      const a = k > 0 ? ys[k - 1] : 2 * ys[0] - ys[1];
      const b = ys[k];
      const c = ys[k + 1];
      const d = k + 2 <= last ? ys[k + 2] : 2 * ys[last] - ys[last - 1];
      this.#xs[i] = left + (place / last) * width;
      this.#ys[i] = b + 0.5 * t * (c - a + t * (2 * a - 5 * b + 4 * c - d + t * (3 * (b - c) + d - a)));
    }
  }

  /** Both sides of the ribbon at one place into the quad, moved `ahead` pixels along the body. */
  #edge(i: number, at: 0 | 4, ahead: number): void {
    const before = Math.max(0, i - 1);
    const after = Math.min(this.#count - 1, i + 1);
    const dx = this.#xs[after] - this.#xs[before];
    const dy = this.#ys[after] - this.#ys[before];
    const length = Math.hypot(dx, dy);
    const half = this.#halfWidths[i];
    const nx = (-dy / length) * half;
    const ny = (dx / length) * half;
    const x = this.#xs[i] + (dx / length) * ahead;
    const y = this.#ys[i] + (dy / length) * ahead;
    // The second edge runs the other way round, so that the four corners go around the quad.
    const sign = at === 0 ? 1 : -1;
    this.#quad[at] = x + sign * nx;
    this.#quad[at + 1] = y + sign * ny;
    this.#quad[at + 2] = x - sign * nx;
    this.#quad[at + 3] = y - sign * ny;
  }
}
