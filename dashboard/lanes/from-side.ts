/** The body seen from its right side, up is up: one line, to the scale of the view from above wherever it fits. */
import { Container, Graphics } from "pixi.js";
import type { Palette } from "../look/palette.ts";
import type { ViewState } from "../stream/view-state.ts";
import type { FromAbove } from "./from-above.ts";
import { CalmRange } from "./grid-steps.ts";
import { type Box, type Lane, type Ruler, stationX } from "./lane.ts";

const PADDING = 8;

export class FromSide implements Lane {
  readonly container = new Container();
  readonly #above: FromAbove;
  readonly #grid = new Graphics();
  readonly #live = new Graphics();
  readonly #range = new CalmRange();
  #box: Box = { left: 0, top: 0, width: 0, height: 0 };
  #ruler: Ruler = { left: 0, width: 0 };
  #palette: Palette | undefined;

  constructor(above: FromAbove) {
    this.#above = above;
    this.container.addChild(this.#grid, this.#live);
  }

  resize(box: Box, ruler: Ruler, palette: Palette): void {
    this.#box = box;
    this.#ruler = ruler;
    this.#palette = palette;
    const y = Math.round(box.top + box.height / 2) + 0.5;
    this.#grid
      .clear()
      .moveTo(ruler.left, y)
      .lineTo(ruler.left + ruler.width, y)
      .stroke({ width: 1, color: palette.faint });
  }

  clear(): void {
    this.#range.reset();
    this.#live.clear();
  }

  draw(view: ViewState): boolean {
    const { midline, pointCount, hubTimeS } = view.frame;
    if (view.runFrameCount === 0 || this.#palette === undefined || this.#above.pixelsPerM === 0) return false;
    const room = this.#box.height / 2 - PADDING;
    let peak = 0;
    for (let i = 0; i < pointCount; i++) peak = Math.max(peak, Math.abs(midline[3 * i + 2]));
    this.#range.update(Math.max(peak, 1e-6), hubTimeS);
    const pixelsPerM = Math.min(this.#above.pixelsPerM, room / this.#range.half);
    const middle = this.#box.top + this.#box.height / 2;
    this.#live.clear();
    for (let i = 0; i < pointCount; i++) {
      const x = stationX(this.#ruler, i / (pointCount - 1));
      const y = middle - midline[3 * i + 2] * pixelsPerM;
      if (i === 0) this.#live.moveTo(x, y);
      else this.#live.lineTo(x, y);
    }
    this.#live.stroke({ width: 2.5, color: this.#palette.ink, alpha: 0.85, join: "round", cap: "round" });
    return true;
  }
}
