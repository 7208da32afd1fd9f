/**
 * Where the body was during the last tailbeat: faint lines at even times, and the envelope around all of them. The lines
 * stand at multiples of their spacing in hub time, so each stays where it is while it fades; the drawing is renewed when
 * a line is added, not with every frame.
 */
import { Graphics } from "pixi.js";
import type { Palette } from "../look/palette.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type Ruler, stationX } from "./lane.ts";

const LINES = 12;
/** Dashes of the envelope between two points of the midline. */
const DASHES = 2;
/** Looked back over while there is no tailbeat, s. */
const SPAN_AT_REST_S = 1;
const LONGEST_SPAN_S = 4;

export class PastPositions {
  readonly graphics = new Graphics();
  #drawnStep = Number.NaN;
  #low = new Float64Array(0);
  #high = new Float64Array(0);

  /** Makes the next draw a full one. */
  forget(): void {
    this.#drawnStep = Number.NaN;
    this.graphics.clear();
  }

  draw(view: ViewState, ruler: Ruler, middle: number, pixelsPerM: number, palette: Palette): void {
    const { past } = view;
    const frequency = view.status?.tailbeat.numbers.frequencyHz.value ?? null;
    const spanS = frequency === null ? SPAN_AT_REST_S : Math.min(LONGEST_SPAN_S, 1 / frequency);
    const spacingS = spanS / LINES;
    const step = Math.floor(past.newestS / spacingS);
    if (step === this.#drawnStep) return;
    this.#drawnStep = step;
    const first = past.firstSince(past.newestS - spanS);
    this.#measure(view, first, middle, pixelsPerM);
    this.graphics.clear();
    this.#drawEnvelope(ruler, palette);
    for (let entry = first + 1; entry < past.total; entry++) {
      const here = Math.floor(past.timeS(entry) / spacingS);
      if (here === Math.floor(past.timeS(entry - 1) / spacingS)) continue;
      const age = (past.newestS - past.timeS(entry)) / spanS;
      for (let i = 0; i < past.pointCount; i++) {
        const x = stationX(ruler, i / (past.pointCount - 1));
        const y = middle - past.sideways(entry, i) * pixelsPerM;
        if (i === 0) this.graphics.moveTo(x, y);
        else this.graphics.lineTo(x, y);
      }
      this.graphics.stroke({ width: 1, color: palette.soft, alpha: 0.5 - 0.42 * age });
    }
  }

  /** Lowest and highest place on the canvas per point since an entry. */
  #measure(view: ViewState, first: number, middle: number, pixelsPerM: number): void {
    const { past } = view;
    if (this.#low.length !== past.pointCount) {
      this.#low = new Float64Array(past.pointCount);
      this.#high = new Float64Array(past.pointCount);
    }
    for (let i = 0; i < past.pointCount; i++) {
      let low = Number.POSITIVE_INFINITY;
      let high = Number.NEGATIVE_INFINITY;
      for (let entry = first; entry < past.total; entry++) {
        const value = past.sideways(entry, i);
        if (value < low) low = value;
        if (value > high) high = value;
      }
      this.#low[i] = middle - low * pixelsPerM;
      this.#high[i] = middle - high * pixelsPerM;
    }
  }

  #drawEnvelope(ruler: Ruler, palette: Palette): void {
    const last = this.#low.length - 1;
    const outline: number[] = [];
    for (let i = 0; i <= last; i++) outline.push(stationX(ruler, i / last), this.#high[i]);
    for (let i = last; i >= 0; i--) outline.push(stationX(ruler, i / last), this.#low[i]);
    this.graphics.poly(outline, true).fill({ color: palette.soft, alpha: 0.06 });
    for (const edge of [this.#low, this.#high]) {
      for (let dash = 0; dash < last * DASHES; dash++) {
        const [from, to] = [dash / DASHES, (dash + 0.5) / DASHES];
        this.graphics
          .moveTo(stationX(ruler, from / last), between(edge, from))
          .lineTo(stationX(ruler, to / last), between(edge, to));
      }
    }
    this.graphics.stroke({ width: 1, color: palette.soft, alpha: 0.75 });
  }
}

function between(edge: Float64Array, at: number): number {
  const i = Math.floor(at);
  return edge[i] + (at - i) * (edge[i + 1] - edge[i]);
}
