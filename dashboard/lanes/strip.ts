/** The last ten minutes: how far the tail went to either side, second by second, and the flags where they began. */
import { Container, Graphics } from "pixi.js";
import type { StripMessage } from "../../bridge/wire/messages.ts";
import type { Palette } from "../look/palette.ts";
import { setText } from "../panels/text.ts";
import { severityRank } from "../stream/sensors.ts";
import type { ViewState } from "../stream/view-state.ts";
import { drawGlyph } from "./glyphs.ts";
import { halfRange } from "./grid-steps.ts";
import { Labels } from "./labels.ts";
import type { Box, Lane, Ruler } from "./lane.ts";

const SPAN_S = 600;
/** Places within the lane, pixels: glyphs above, times beneath. */
const GLYPH_Y = 14;
const TOP = 22;
const BOTTOM = 24;

export class Strip implements Lane {
  readonly container = new Container();
  readonly #graphics = new Graphics();
  readonly #labels: Labels;
  readonly #scaleText: HTMLElement;
  #box: Box = { left: 0, top: 0, width: 0, height: 0 };
  #ruler: Ruler = { left: 0, width: 0 };
  #palette: Palette | undefined;
  #drawnStrip: unknown;
  #drawnFlags: unknown;

  constructor(section: HTMLElement) {
    this.#labels = new Labels(section, "axis");
    this.#scaleText = section.querySelector("#strip-scale")!;
    this.container.addChild(this.#graphics);
  }

  resize(box: Box, ruler: Ruler, palette: Palette): void {
    this.#box = box;
    this.#ruler = ruler;
    this.#palette = palette;
    this.#drawnStrip = undefined;
    this.#labels.begin();
    const everyMinutes = ruler.width < 500 ? 5 : 2;
    for (let minutes = 0; minutes <= 10; minutes += everyMinutes) {
      const x = ruler.left + (1 - minutes / 10) * ruler.width;
      const anchor = minutes === 0 ? "right" : minutes === 10 ? "left" : "middle";
      this.#labels.put(minutes === 0 ? "now" : `${minutes} min ago`, x, box.height - 11, anchor);
    }
    this.#labels.end();
  }

  /** @returns whether anything changed */
  draw(view: ViewState): boolean {
    const palette = this.#palette;
    if (palette === undefined || (view.strip === this.#drawnStrip && view.flags === this.#drawnFlags)) {
      return false;
    }
    this.#drawnStrip = view.strip;
    this.#drawnFlags = view.flags;
    this.#graphics.clear();
    const { left, width } = this.#ruler;
    const middle = Math.round(this.#box.top + (TOP + this.#box.height - BOTTOM) / 2) + 0.5;
    this.#graphics
      .moveTo(left, middle)
      .lineTo(left + width, middle)
      .stroke({ width: 1, color: palette.hairline });
    if (view.strip === null) return true;
    const endS = view.strip.startS + view.strip.lowM.length * view.strip.columnS;
    this.#drawExcursion(view.strip, endS, middle, palette);
    this.#drawFlags(view, endS, palette);
    return true;
  }

  #x(timeS: number, endS: number): number {
    return this.#ruler.left + (1 - (endS - timeS) / SPAN_S) * this.#ruler.width;
  }

  #drawExcursion(strip: StripMessage, endS: number, middle: number, palette: Palette): void {
    const { startS, columnS, lowM, highM } = strip;
    let peak = 0.001;
    for (let i = 0; i < lowM.length; i++) peak = Math.max(peak, -(lowM[i] ?? 0), highM[i] ?? 0);
    const half = halfRange(peak);
    setText(this.#scaleText, `tail, ± ${Number((half * 1000).toPrecision(3))} mm`);
    const pixelsPerM = (this.#box.height - TOP - BOTTOM) / 2 / half;
    let outline: number[] = [];
    const back: number[] = [];
    for (let i = 0; i <= lowM.length; i++) {
      const low = lowM[i] ?? null;
      const high = highM[i] ?? null;
      if (low === null || high === null) {
        for (let k = back.length - 2; k >= 0; k -= 2) outline.push(back[k], back[k + 1]);
        if (outline.length > 0) this.#graphics.poly(outline, true).fill({ color: palette.soft, alpha: 0.55 });
        outline = [];
        back.length = 0;
        continue;
      }
      const x = this.#x(startS + i * columnS, endS);
      const next = this.#x(startS + (i + 1) * columnS, endS);
      // At least a hairline high: a body at rest is not the same as nothing received.
      const top = Math.min(middle - 0.5, middle - high * pixelsPerM);
      const bottom = Math.max(middle + 0.5, middle - low * pixelsPerM);
      outline.push(x, top, next, top);
      back.push(x, bottom, next, bottom);
    }
  }

  #drawFlags(view: ViewState, endS: number, palette: Palette): void {
    // Worst last, so that an alarm is never covered.
    const flags = [...(view.flags?.ended ?? []), ...(view.flags?.open ?? [])].sort(
      (a, b) => severityRank(a.severity) - severityRank(b.severity),
    );
    for (const flag of flags) {
      if (endS - flag.startS > SPAN_S) continue;
      const { left, width } = this.#ruler;
      const x = Math.min(left + width - 1, Math.max(left, Math.round(this.#x(flag.startS, endS)) + 0.5));
      const colour = palette[flag.severity];
      const top = this.#box.top;
      this.#graphics
        .moveTo(x, top + TOP)
        .lineTo(x, top + this.#box.height - BOTTOM)
        .stroke({ width: 1.5, color: colour });
      drawGlyph(this.#graphics, flag.severity, Math.min(x, left + width - 6), top + GLYPH_Y, colour);
    }
  }
}
