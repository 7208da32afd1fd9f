/**
 * The midline from above: the live ribbon, the positions it passed in the last tailbeat, the envelope of their extremes.
 * Millimetres across are as long as millimetres along while the envelope fits; beyond that they shrink by round steps.
 */
import { Container, Graphics } from "pixi.js";
import { TRUST_LOST, trustOf } from "../stream/sensors.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, type Lane, roundStep, stationX, Ticks } from "./lane.ts";
import { bodyColour, type Palette } from "./palette.ts";
import { PastPositions } from "./past-positions.ts";

/** How often the envelope and the scale are worked out anew, ms. */
const CALM_MS = 250;
/** The envelope spans this long when the body does not beat, s. */
const RESTING_SPAN_S = 2;
/** The scale shrinks back when the envelope fills less than this share of it ... */
const ROOMY_SHARE = 0.4;
/** ... for so long, ms. */
const ROOMY_MS = 4000;
/** Least distance between two lines of the grid, CSS pixels. */
const LINE_SPACING = 26;
/** The lane's name and words beside it reach so far down: no number there. */
const LABEL_HEIGHT = 60;
const SENSOR_RADIUS = 5.5;

export class AboveLane implements Lane {
  readonly shapes = new Container();
  readonly #grid = new Graphics();
  readonly #past = new PastPositions();
  readonly #envelope = new Graphics();
  readonly #ribbon = new Graphics();
  readonly #ticks = new Ticks("lane-above");
  #box: Box = { top: 0, height: 0, nose: 0, tail: 0 };
  #palette: Palette | null = null;
  #lengthM = 1;
  #widthM = 0;
  /** CSS pixels a metre, across the body. */
  #scale = 1;
  /** What half the lane's height stands for, m. */
  #rangeM = 0;
  #roomySinceMs = 0;
  #calmAtMs = Number.NEGATIVE_INFINITY;
  #run = -1;
  #low = new Float32Array(0);
  #high = new Float32Array(0);

  constructor() {
    this.shapes.addChild(this.#grid, this.#envelope, this.#past.shapes, this.#ribbon);
  }

  place(box: Box, palette: Palette, view: ViewState): void {
    this.#box = box;
    this.#palette = palette;
    const { welcome } = view;
    this.#lengthM = welcome?.lengthM ?? 1;
    this.#widthM = welcome?.widthM ?? this.#lengthM * 0.06;
    this.#rangeM = this.#trueRange();
    this.#rescale(this.#rangeM);
    this.#calmAtMs = Number.NEGATIVE_INFINITY;
    if (view.hasFrame) this.draw(view, performance.now());
    else this.#ribbon.clear();
  }

  draw(view: ViewState, nowMs: number): void {
    if (view.run !== this.#run) {
      this.#run = view.run;
      this.#past.forget();
      this.#envelope.clear();
    }
    if (!view.hasFrame || this.#palette === null) {
      this.#ribbon.clear();
      return;
    }
    if (nowMs - this.#calmAtMs >= CALM_MS) {
      this.#calmAtMs = nowMs;
      this.#drawEnvelope(view, nowMs);
    }
    this.#past.draw(view, this.#box, this.#middle, this.#scale, this.#palette);
    this.#drawRibbon(view, this.#palette);
  }

  get #middle(): number {
    return this.#box.top + this.#box.height / 2;
  }

  /** Half the lane's height, m, when across is drawn as long as along. */
  #trueRange(): number {
    const pixelsPerM = (this.#box.tail - this.#box.nose) / this.#lengthM;
    return pixelsPerM > 0 ? this.#box.height / 2 / pixelsPerM : 1;
  }

  #rescale(rangeM: number): void {
    this.#rangeM = rangeM;
    this.#scale = this.#box.height / 2 / rangeM;
    this.#past.forget();
    this.#drawGrid();
  }

  #drawGrid(): void {
    const { nose, tail, top, height } = this.#box;
    const grid = this.#grid.clear();
    const stepM = roundStep(LINE_SPACING / this.#scale);
    const lines = Math.floor((this.#rangeM * 0.97) / stepM);
    const ticks = [];
    for (let i = -lines; i <= lines; i++) {
      const y = Math.round(this.#middle - i * stepM * this.#scale) + 0.5;
      grid.moveTo(nose, y).lineTo(tail, y);
      const mm = Math.round(i * stepM * 1000);
      const text = mm === 0 ? "0 mm" : mm > 0 ? `+${mm}` : `−${-mm}`;
      if (y - top > LABEL_HEIGHT) ticks.push({ text, x: nose - 10, y: y - top, align: "left" as const });
    }
    grid.stroke({ width: 1, color: this.#palette!.faint });
    this.#ticks.show(height > 0 ? ticks : []);
  }

  #drawEnvelope(view: ViewState, nowMs: number): void {
    const { history } = view;
    if (this.#low.length !== history.pointCount) {
      this.#low = new Float32Array(history.pointCount);
      this.#high = new Float32Array(history.pointCount);
    }
    const frequency = view.status?.tailbeat.frequencyHz ?? null;
    const spanS = frequency === null ? RESTING_SPAN_S : 1 / frequency;
    const envelope = this.#envelope.clear();
    if (!history.envelope(view.frame.hubTimeS - spanS, this.#low, this.#high)) return;
    this.#fitScale(nowMs);
    const last = history.pointCount - 1;
    const x = (point: number) => stationX(this.#box, point / last);
    const y = (metres: number) => this.#middle - metres * this.#scale;
    envelope.moveTo(x(0), y(this.#high[0]!));
    for (let point = 1; point <= last; point++) envelope.lineTo(x(point), y(this.#high[point]!));
    for (let point = last; point >= 0; point--) envelope.lineTo(x(point), y(this.#low[point]!));
    envelope.closePath().fill({ color: this.#palette!.soft, alpha: 0.07 });
    // Dashes: every other segment.
    for (const edge of [this.#low, this.#high]) {
      for (let point = 0; point < last; point += 2) {
        envelope.moveTo(x(point), y(edge[point]!)).lineTo(x(point + 1), y(edge[point + 1]!));
      }
    }
    envelope.stroke({ width: 1, color: this.#palette!.soft, alpha: 0.7 });
  }

  /** Widens the range at once when the envelope leaves it; narrows it when there has been room for a while. */
  #fitScale(nowMs: number): void {
    let greatest = 0;
    for (let i = 0; i < this.#low.length; i++) {
      greatest = Math.max(greatest, Math.abs(this.#low[i]!), Math.abs(this.#high[i]!));
    }
    const least = this.#trueRange();
    if (greatest > ROOMY_SHARE * this.#rangeM) this.#roomySinceMs = nowMs;
    if (greatest > 0.96 * this.#rangeM) this.#rescale(roundStep(greatest * 1.15));
    else if (this.#rangeM > least && nowMs - this.#roomySinceMs > ROOMY_MS) {
      this.#rescale(Math.max(least, roundStep(greatest * 1.15)));
    }
  }

  #drawRibbon({ frame, welcome }: ViewState, palette: Palette): void {
    const { midline, pointCount } = frame;
    const ribbon = this.#ribbon.clear();
    const last = pointCount - 1;
    for (let point = 0; point < last; point++) {
      const from = point / last;
      const to = (point + 1) / last;
      const x0 = stationX(this.#box, from);
      const x1 = stationX(this.#box, to);
      const y0 = this.#middle - midline[3 * point + 1]! * this.#scale;
      const y1 = this.#middle - midline[3 * point + 4]! * this.#scale;
      const h0 = this.#halfWidth(from);
      const h1 = this.#halfWidth(to);
      // Half a pixel of overlap hides the seam between two segments.
      ribbon
        .poly([x0 - 0.5, y0 - h0, x1 + 0.5, y1 - h1, x1 + 0.5, y1 + h1, x0 - 0.5, y0 + h0])
        .fill(bodyColour(palette, (from + to) / 2));
    }
    welcome?.sensors.forEach(({ station }, i) => {
      const at = station * last;
      const point = Math.min(Math.floor(at), last - 1);
      const share = at - point;
      const lateral = midline[3 * point + 1]! * (1 - share) + midline[3 * point + 4]! * share;
      const x = stationX(this.#box, station);
      const y = this.#middle - lateral * this.#scale;
      const lost = trustOf(frame, i) === TRUST_LOST;
      const radius = welcome.sensors.length > 24 ? 3 : SENSOR_RADIUS;
      ribbon.circle(x, y, radius);
      if (!lost) ribbon.fill(palette.ground);
      ribbon.stroke({ width: 1.5, color: palette.ink, alpha: lost ? 0.5 : 1 });
    });
  }

  /** Half the ribbon's width at a station, CSS pixels: blunt ahead, slender behind. For the eye; no sensor measures it. */
  #halfWidth(station: number): number {
    const pixelsPerM = (this.#box.tail - this.#box.nose) / this.#lengthM;
    const widest = Math.min(Math.max((this.#widthM * pixelsPerM) / 2, 6), 26) * 0.5;
    const shape =
      Math.sqrt(Math.min(station / 0.12, 1)) * (1 - 0.82 * Math.max(0, (station - 0.25) / 0.75) ** 0.9);
    return Math.max(1.5, widest * shape);
  }
}
