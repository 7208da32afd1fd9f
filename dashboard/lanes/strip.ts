/** The last ten minutes at a glance: how far the tail went to either side, and every flag at its moment. */
import { Container, Graphics } from "pixi.js";
import type { Severity } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, type Lane, Ticks } from "./lane.ts";
import type { Palette } from "./palette.ts";

const SPAN_S = 600;
const REDRAW_MS = 500;
const GLYPH_Y = 12;
const BASE_Y = 42;
const HALF_HEIGHT = 18;
const LABELS_Y = 64;

export class StripLane implements Lane {
  readonly shapes = new Container();
  readonly #band = new Graphics();
  readonly #ticks = new Ticks("lane-strip");
  #box: Box = { top: 0, height: 0, nose: 0, tail: 0 };
  #palette: Palette | null = null;
  #drawnAtMs = Number.NEGATIVE_INFINITY;

  constructor() {
    this.shapes.addChild(this.#band);
  }

  place(box: Box, palette: Palette, view: ViewState): void {
    this.#box = box;
    this.#palette = palette;
    const ticks = [];
    for (let minutes = 0; minutes <= 10; minutes += 2) {
      const text = minutes === 0 ? "now" : `${minutes} min ago`;
      ticks.push({ text, x: this.#x(minutes * 60), y: LABELS_Y, align: "middle" as const });
    }
    this.#ticks.show(ticks);
    this.#drawnAtMs = Number.NEGATIVE_INFINITY;
    this.draw(view, 0);
  }

  draw(view: ViewState, nowMs: number): void {
    if (nowMs - this.#drawnAtMs < REDRAW_MS || this.#palette === null) return;
    this.#drawnAtMs = nowMs;
    const { top, nose, tail } = this.#box;
    const band = this.#band.clear();
    const y = Math.round(top + BASE_Y) + 0.5;
    band.moveTo(nose, y).lineTo(tail, y).stroke({ width: 1, color: this.#palette.faint });
    this.#drawBand(view, band, y);
    const nowS = view.status?.hubTimeS ?? 0;
    for (const { startS, severity } of [...view.flags.ended, ...view.flags.open]) {
      if (nowS - startS <= SPAN_S && nowS >= startS) this.#drawFlag(this.#x(nowS - startS), severity);
    }
  }

  #x(agoS: number): number {
    const { nose, tail } = this.#box;
    return tail - (agoS / SPAN_S) * (tail - nose);
  }

  #drawBand({ strip, status }: ViewState, band: Graphics, y: number): void {
    if (strip === null || strip.lowM.length === 0) return;
    const nowS = status?.hubTimeS ?? strip.startS + strip.lowM.length * strip.columnS;
    let greatest = 1e-3;
    for (const value of [...strip.lowM, ...strip.highM]) greatest = Math.max(greatest, Math.abs(value ?? 0));
    strip.lowM.forEach((low, i) => {
      const high = strip.highM[i];
      if (low === null || high === null || high === undefined) return;
      const from = this.#x(Math.max(0, nowS - (strip.startS + i * strip.columnS)));
      const to = this.#x(Math.max(0, nowS - (strip.startS + (i + 1) * strip.columnS)));
      const up = (high / greatest) * HALF_HEIGHT;
      const down = (low / greatest) * HALF_HEIGHT;
      if (to > this.#box.nose) band.rect(from, y - up, Math.max(1, to - from), Math.max(1, up - down));
    });
    band.fill({ color: this.#palette!.soft, alpha: 0.55 });
  }

  #drawFlag(x: number, severity: Severity): void {
    const y = this.#box.top + GLYPH_Y;
    const color = this.#palette![severity];
    this.#band
      .moveTo(x, y + 5)
      .lineTo(x, this.#box.top + BASE_Y + HALF_HEIGHT)
      .stroke({ width: 1.5, color });
    if (severity === "alarm") this.#band.rect(x - 4.5, y - 4.5, 9, 9).fill(color);
    else if (severity === "caution") this.#band.poly([x, y - 6, x + 6, y, x, y + 6, x - 6, y]).fill(color);
    else this.#band.circle(x, y, 4).stroke({ width: 2, color });
  }
}
