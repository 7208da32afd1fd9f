/**
 * The body seen from above, left of the body up: the live ribbon, its positions during the last tailbeat, and the
 * envelope they fill. Points lie at their station on the ruler, sensors therefore exactly over their place on it;
 * sideways is drawn to its own scale, which the lane states.
 */
import { Container, Graphics } from "pixi.js";
import type { Palette } from "../look/palette.ts";
import { setText } from "../panels/text.ts";
import { openSeverity, sensorLost } from "../stream/sensors.ts";
import type { ViewState } from "../stream/view-state.ts";
import { drawGlyph } from "./glyphs.ts";
import { CalmRange, gridStep } from "./grid-steps.ts";
import { Labels } from "./labels.ts";
import { type Box, type Lane, type Ruler, stationX } from "./lane.ts";
import { PastPositions } from "./past-positions.ts";
import { Ribbon } from "./ribbon.ts";

/** Ground kept free above and below the range, pixels. */
const PADDING = 18;
const LEAST_LINE_DISTANCE = 34;
/** The range never shows less than this share of the body length to either side. */
const LEAST_HALF_SHARE = 0.02;

export class FromAbove implements Lane {
  readonly container = new Container();
  /** Pixels a metre sideways; the side view keeps to it where it can. */
  pixelsPerM = 0;
  readonly #grid = new Graphics();
  /** y on the canvas of each point of the midline. */
  #ys = new Float64Array(0);
  readonly #past = new PastPositions();
  readonly #live = new Graphics();
  readonly #ribbon = new Ribbon();
  readonly #range = new CalmRange();
  readonly #labels: Labels;
  readonly #scaleText: HTMLElement;
  #box: Box = { left: 0, top: 0, width: 0, height: 0 };
  #ruler: Ruler = { left: 0, width: 0 };
  #palette: Palette | undefined;
  #preparedFor = "";

  constructor(section: HTMLElement) {
    this.#labels = new Labels(section, "axis");
    this.#scaleText = section.querySelector("#above-scale")!;
    this.container.addChild(this.#grid, this.#past.graphics, this.#live);
  }

  resize(box: Box, ruler: Ruler, palette: Palette): void {
    this.#box = box;
    this.#ruler = ruler;
    this.#palette = palette;
    this.#preparedFor = "";
    this.#past.forget();
    this.#rescale();
  }

  /** Empties the lane for a run that has shown nothing yet. */
  clear(): void {
    this.#range.reset();
    this.#past.forget();
    this.#live.clear();
    this.#rescale();
  }

  draw(view: ViewState): boolean {
    const { frame, welcome } = view;
    if (view.runFrameCount === 0 || welcome === null || this.#palette === undefined) return false;
    let peak = LEAST_HALF_SHARE * welcome.lengthM;
    for (let i = 0; i < frame.pointCount; i++) peak = Math.max(peak, Math.abs(frame.midline[3 * i + 1]));
    if (this.#range.update(peak, frame.hubTimeS)) {
      this.#past.forget();
      this.#rescale();
      const exaggeration = this.pixelsPerM / (this.#ruler.width / welcome.lengthM);
      setText(this.#scaleText, `left of body up, sideways × ${exaggeration.toFixed(1)}`);
    }
    this.#prepare(view);
    const middle = this.#box.top + this.#box.height / 2;
    for (let i = 0; i < frame.pointCount; i++) {
      this.#ys[i] = middle - frame.midline[3 * i + 1] * this.pixelsPerM;
    }
    this.#past.draw(view, this.#ruler, middle, this.pixelsPerM, this.#palette);
    this.#live.clear();
    this.#ribbon.draw(this.#live, this.#ruler.left, this.#ruler.width, this.#ys);
    this.#drawSensors(view, this.#palette);
    return true;
  }

  #prepare(view: ViewState): void {
    const { frame, welcome } = view;
    const key = `${frame.pointCount} ${welcome!.runId}`;
    if (this.#preparedFor === key) return;
    this.#preparedFor = key;
    this.#ys = new Float64Array(frame.pointCount);
    const natural = ((welcome!.widthM ?? 0.03 * welcome!.lengthM) / welcome!.lengthM) * this.#ruler.width;
    const widthCss = Math.min(30, Math.max(9, natural));
    this.#ribbon.prepare(frame.pointCount, welcome!.bodyKind, widthCss, this.#palette!.body);
  }

  #rescale(): void {
    const { top, height } = this.#box;
    const half = this.#range.half;
    const room = height / 2 - PADDING;
    this.pixelsPerM = half > 0 ? room / half : 0;
    const grid = this.#grid.clear();
    const palette = this.#palette;
    if (palette === undefined) return;
    const middle = top + height / 2;
    const step = half > 0 ? gridStep((LEAST_LINE_DISTANCE / room) * half) : 0;
    const lines = half > 0 ? Math.floor(half / step + 1e-6) : 0;
    this.#labels.begin();
    for (let k = -lines; k <= lines; k++) {
      const y = Math.round(middle - k * step * this.pixelsPerM) + 0.5;
      grid
        .moveTo(this.#ruler.left, y)
        .lineTo(this.#ruler.left + this.#ruler.width, y)
        .stroke({ width: 1, color: k === 0 ? palette.hairline : palette.faint });
      if (half > 0) this.#labels.put(millimetres(k * step), this.#ruler.left - 10, y - top, "right");
    }
    this.#labels.end();
  }

  #drawSensors(view: ViewState, palette: Palette): void {
    const { sensors } = view.welcome!;
    const last = this.#ys.length - 1;
    const radius = sensors.length > 24 ? 2.5 : 4;
    for (let i = 0; i < sensors.length; i++) {
      const at = sensors[i].station * last;
      const k = Math.min(Math.floor(at), last - 1);
      const y = this.#ys[k] + (at - k) * (this.#ys[k + 1] - this.#ys[k]);
      const x = stationX(this.#ruler, sensors[i].station);
      const severity = openSeverity(view, i);
      const lost = sensorLost(view, i);
      if (severity !== null) {
        this.#live.circle(x, y, radius + 4).fill(palette.ground);
        drawGlyph(this.#live, severity, x, y, palette[severity]);
      } else {
        this.#live
          .circle(x, y, radius + 0.5)
          .fill(lost ? palette.ground : palette.ink)
          .stroke({ width: 2, color: lost ? palette.soft : palette.ground });
      }
    }
  }
}

function millimetres(m: number): string {
  const mm = Math.round(m * 1e5) / 100;
  return mm === 0 ? "0 mm" : `${mm > 0 ? "+" : "−"}${Math.abs(mm)}`;
}
