/** The midline from the side, at the scale it has along the body: nearly flat for a body that beats sideways. */
import { Container, Graphics } from "pixi.js";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, type Lane, stationX } from "./lane.ts";
import type { Palette } from "./palette.ts";

export class SideLane implements Lane {
  readonly shapes = new Container();
  readonly #level = new Graphics();
  readonly #line = new Graphics();
  #box: Box = { top: 0, height: 0, nose: 0, tail: 0 };
  #palette: Palette | null = null;
  #lengthM = 1;

  constructor() {
    this.shapes.addChild(this.#level, this.#line);
  }

  place(box: Box, palette: Palette, view: ViewState): void {
    this.#box = box;
    this.#palette = palette;
    this.#lengthM = view.welcome?.lengthM ?? 1;
    const y = Math.round(box.top + box.height / 2) + 0.5;
    this.#level.clear().moveTo(box.nose, y).lineTo(box.tail, y).stroke({ width: 1, color: palette.faint });
    this.draw(view);
  }

  draw({ frame, hasFrame }: ViewState): void {
    const line = this.#line.clear();
    if (!hasFrame || this.#palette === null) return;
    const { top, height, nose, tail } = this.#box;
    const last = frame.pointCount - 1;
    let greatest = 0;
    for (let point = 0; point <= last; point++) {
      greatest = Math.max(greatest, Math.abs(frame.midline[3 * point + 2]!));
    }
    // True to scale while it fits; a steep body is pressed into the lane.
    const trueScale = (tail - nose) / this.#lengthM;
    const scale = Math.min(trueScale, (height / 2 - 5) / Math.max(greatest, 1e-6));
    const y = (point: number) => top + height / 2 - frame.midline[3 * point + 2]! * scale;
    line.moveTo(stationX(this.#box, 0), y(0));
    for (let point = 1; point <= last; point++) line.lineTo(stationX(this.#box, point / last), y(point));
    line.stroke({ width: 2, color: this.#palette.ink });
  }
}
