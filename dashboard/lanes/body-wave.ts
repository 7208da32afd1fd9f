/**
 * The body wave as a waterfall: place on the body across, time downwards, newest on top; warm where the body is left of
 * its mean line, cool where right. What a flag covers is outlined at its sensor, for the time it was open.
 */
import { Container, Graphics, Sprite, Texture } from "pixi.js";
import type { Flag } from "../../bridge/wire/flag.ts";
import type { Palette } from "../look/palette.ts";
import { setText } from "../panels/text.ts";
import type { ViewState } from "../stream/view-state.ts";
import { CalmRange } from "./grid-steps.ts";
import { Labels } from "./labels.ts";
import { type Box, type Lane, type Ruler, stationX } from "./lane.ts";
import { WAVE_SPAN_S, WaveImage } from "./wave-image.ts";

const PADDING = 10;
const DASH = 4;

export class BodyWave implements Lane {
  readonly container = new Container();
  readonly #image = new WaveImage();
  readonly #texture = Texture.from(this.#image.canvas);
  readonly #sprite = new Sprite(this.#texture);
  readonly #outlines = new Graphics();
  readonly #range = new CalmRange();
  readonly #labels: Labels;
  readonly #scaleText: HTMLElement;
  #box: Box = { left: 0, top: 0, width: 0, height: 0 };
  #ruler: Ruler = { left: 0, width: 0 };
  #palette: Palette | undefined;

  constructor(section: HTMLElement) {
    this.#labels = new Labels(section, "axis");
    this.#scaleText = section.querySelector("#wave-scale")!;
    this.container.addChild(this.#sprite, this.#outlines);
  }

  resize(box: Box, ruler: Ruler, palette: Palette): void {
    this.#box = { ...box, top: box.top + PADDING, height: Math.max(1, box.height - 2 * PADDING) };
    this.#ruler = ruler;
    this.#palette = palette;
    this.#sprite.position.set(ruler.left, this.#box.top);
    this.#sprite.setSize(ruler.width, this.#box.height);
    this.#image.setScale(this.#range.half || 1, palette);
    this.#texture.source.update();
    this.#labels.begin();
    const everyS = this.#box.height < 90 ? 2 : 1;
    for (let s = 0; s <= WAVE_SPAN_S; s += everyS) {
      const y = PADDING + (s / WAVE_SPAN_S) * this.#box.height;
      const inside = s === 0 ? 5 : s === WAVE_SPAN_S ? -5 : 0;
      this.#labels.put(s === 0 ? "now" : `${s} s`, ruler.left - 10, y + inside, "right");
    }
    this.#labels.end();
  }

  clear(): void {
    this.#range.reset();
    this.#image.clear();
    this.#outlines.clear();
    this.#texture.source.update();
  }

  draw(view: ViewState): boolean {
    const { frame, welcome } = view;
    if (view.runFrameCount === 0 || welcome === null || this.#palette === undefined) return false;
    let peak = 0.01 * welcome.lengthM;
    for (let i = 0; i < frame.pointCount; i++) peak = Math.max(peak, Math.abs(frame.midline[3 * i + 1]));
    const rescaled = this.#range.update(peak, frame.hubTimeS);
    if (rescaled) {
      this.#image.setScale(this.#range.half, this.#palette);
      setText(this.#scaleText, `sideways, ± ${Number((this.#range.half * 1000).toPrecision(3))} mm`);
    }
    if (this.#image.advance(view.past) || rescaled) this.#texture.source.update();
    this.#drawOutlines(view, this.#palette);
    return true;
  }

  #drawOutlines(view: ViewState, palette: Palette): void {
    this.#outlines.clear();
    const now = view.frame.hubTimeS;
    for (const flag of view.flags?.open ?? []) this.#outline(flag, now, view, palette);
    for (const flag of view.flags?.ended ?? []) this.#outline(flag, now, view, palette);
  }

  #outline(flag: Flag, now: number, view: ViewState, palette: Palette): void {
    const endAge = flag.endS === null ? 0 : Math.max(0, now - flag.endS);
    if (endAge >= WAVE_SPAN_S) return;
    const { top, height } = this.#box;
    const startAge = Math.min(WAVE_SPAN_S, Math.max(endAge, now - flag.startS));
    const [left, right] = this.#sides(flag.sensor, view);
    const from = Math.round(top + (endAge / WAVE_SPAN_S) * height) + 0.5;
    const to = Math.max(from + 3, Math.round(top + (startAge / WAVE_SPAN_S) * height) - 0.5);
    if (flag.severity === "alarm") this.#outlines.rect(left, from, right - left, to - from);
    else {
      const dash = flag.severity === "notice" ? DASH / 2 : DASH;
      for (let y = from; y < to; y += 2 * dash) {
        const end = Math.min(to, y + dash);
        this.#outlines.moveTo(left, y).lineTo(left, end).moveTo(right, y).lineTo(right, end);
      }
      this.#outlines.moveTo(left, from).lineTo(right, from).moveTo(left, to).lineTo(right, to);
    }
    this.#outlines.stroke({ width: 1.5, color: palette[flag.severity] });
  }

  /** From where to where across an outline reaches: about the sensor; for the whole rig, along the lane's edge. */
  #sides(sensor: number, view: ViewState): readonly [number, number] {
    const { sensors } = view.welcome!;
    const end = this.#ruler.left + this.#ruler.width;
    const at = sensors[sensor];
    if (at === undefined) return [end + 5.5, end + 11.5];
    const half = sensors.length > 24 ? 4 : 9;
    const x = Math.round(stationX(this.#ruler, at.station)) + 0.5;
    return [Math.max(this.#ruler.left + 1, x - half), Math.min(end - 1, x + half)];
  }
}
