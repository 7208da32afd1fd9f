/**
 * The body wave as it ran down the body in the last seconds: a row of pixels a moment, newest on top, coloured by the
 * excursion either side of the mean line and fading to the ground at zero. Stretches where a sensor was flagged are
 * outlined in place.
 */
import { CanvasSource, Container, Graphics, Sprite, Texture } from "pixi.js";
import type { Severity } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, type Lane, stationX, Ticks } from "./lane.ts";
import { mix, type Palette } from "./palette.ts";

const SPAN_S = 3;
const ROWS_PER_S = 80;
const ROWS = SPAN_S * ROWS_PER_S;
/** A frame stands for at most so many rows; where none came for longer, the ground shows. */
const ROWS_A_FRAME = 16;
/** Steps of the colour scale either side of zero. */
const STEPS = 127;
/** The colour scale follows the greatest excursion with this time constant, s, so that it does not flicker. */
const SCALE_S = 2;
const LEAST_SCALE_SHARE = 0.01;

export class WaveLane implements Lane {
  readonly shapes = new Container();
  readonly #marks = new Graphics();
  readonly #sprite = new Sprite();
  readonly #ticks = new Ticks("lane-wave");
  /** A row of pixels a moment, a column a point of the midline; stretched over the lane. */
  readonly #canvas = document.createElement("canvas");
  readonly #pen = this.#canvas.getContext("2d", { willReadFrequently: true })!;
  #row = this.#pen.createImageData(1, 1);
  #texture: Texture | null = null;
  #colours: Uint32Array = new Uint32Array(2 * STEPS + 1);
  #box: Box = { top: 0, height: 0, nose: 0, tail: 0 };
  #palette: Palette | null = null;
  #lengthM = 1;
  #run = -1;
  /** Moment of the top row, in rows since hub time 0; -1 before the first. */
  #newestRow = -1;
  #scaleM = 0;

  constructor() {
    this.shapes.addChild(this.#sprite, this.#marks);
  }

  place(box: Box, palette: Palette, view: ViewState): void {
    this.#box = box;
    this.#lengthM = view.welcome?.lengthM ?? 1;
    if (palette !== this.#palette) {
      this.#palette = palette;
      this.#colours = colourScale(palette);
      this.#repaint(view);
    }
    this.#sprite.position.set(box.nose, box.top);
    this.#sprite.setSize(box.tail - box.nose, Math.max(0, box.height - 12));
    const y = (s: number) => (s / SPAN_S) * (box.height - 12);
    const ticks = [];
    for (let s = 0; s <= SPAN_S; s++) {
      ticks.push({
        text: s === 0 ? "now" : `${s} s`,
        x: box.nose - 10,
        y: Math.max(6, y(s)),
        align: "left" as const,
      });
    }
    this.#ticks.show(ticks);
  }

  draw(view: ViewState): void {
    const { history, frame } = view;
    if (history.pointCount > 0 && this.#canvas.width !== history.pointCount) this.#resize(history.pointCount);
    if (view.run !== this.#run) {
      this.#run = view.run;
      this.#repaint(view);
    }
    this.#marks.clear();
    if (!view.hasFrame || this.#texture === null) return;
    const rows = Math.floor(frame.hubTimeS * ROWS_PER_S) - this.#newestRow;
    if (rows < 0 || rows > ROWS) this.#repaint(view);
    else if (rows > 0) this.#scroll(view, rows);
    this.#outlineFlags(view);
  }

  #resize(points: number): void {
    this.#canvas.width = points;
    this.#canvas.height = ROWS;
    this.#row = this.#pen.createImageData(points, 1);
    this.#texture?.destroy(true);
    this.#texture = new Texture({
      source: new CanvasSource({ resource: this.#canvas, scaleMode: "linear" }),
    });
    this.#sprite.texture = this.#texture;
    this.#sprite.setSize(this.#box.tail - this.#box.nose, Math.max(0, this.#box.height - 12));
  }

  /** Draws the whole past anew, from the history: after a change of light, run, or a jump in time. */
  #repaint(view: ViewState): void {
    this.#pen.clearRect(0, 0, this.#canvas.width, ROWS);
    this.#texture?.source.update();
    const { history } = view;
    this.#newestRow = -1;
    if (!view.hasFrame || this.#texture === null) return;
    this.#scaleM = 0;
    for (let index = history.oldest; index < history.count; index++) this.#followScale(view, index, 1);
    const newest = history.count - 1;
    this.#newestRow = Math.floor(history.timeS(newest) * ROWS_PER_S);
    this.#paintRows(view, ROWS);
  }

  #scroll(view: ViewState, rows: number): void {
    const newest = view.history.count - 1;
    this.#followScale(view, newest, 1 - Math.exp(-rows / ROWS_PER_S / SCALE_S));
    this.#pen.globalCompositeOperation = "copy";
    this.#pen.drawImage(this.#canvas, 0, rows);
    this.#pen.globalCompositeOperation = "source-over";
    this.#newestRow += rows;
    this.#paintRows(view, rows);
  }

  /** Paints so many rows from the top, each with the frame of its moment; the ground shows where none was received. */
  #paintRows(view: ViewState, rows: number): void {
    const { history } = view;
    let index = history.count - 1;
    for (let y = 0; y < rows; y++) {
      const row = this.#newestRow - y;
      while (index > history.oldest && history.timeS(index) * ROWS_PER_S >= row + 1) index--;
      const rowsSince = row - Math.floor(history.timeS(index) * ROWS_PER_S);
      if (rowsSince >= 0 && rowsSince < ROWS_A_FRAME) this.#paintRow(view, index, y);
    }
    this.#texture!.source.update();
  }

  /** Grows with the excursion at once, shrinks slowly. */
  #followScale({ history }: ViewState, index: number, share: number): void {
    let greatest = LEAST_SCALE_SHARE * this.#lengthM;
    for (let point = 0; point < history.pointCount; point++) {
      greatest = Math.max(greatest, Math.abs(history.lateral(index, point)));
    }
    this.#scaleM = Math.max(
      greatest,
      this.#scaleM + (greatest - this.#scaleM) * (share === 1 ? 0 : share * 0.1),
    );
  }

  #paintRow({ history }: ViewState, index: number, y: number): void {
    const pixels = new Uint32Array(this.#row.data.buffer);
    for (let point = 0; point < history.pointCount; point++) {
      const share = history.lateral(index, point) / this.#scaleM;
      pixels[point] = this.#colours[Math.round(Math.max(-1, Math.min(1, share)) * STEPS) + STEPS]!;
    }
    this.#pen.putImageData(this.#row, 0, y);
  }

  #outlineFlags({ flags, frame, welcome }: ViewState): void {
    for (const list of [flags.open, flags.ended]) {
      for (const { sensor, startS, endS, severity } of list) {
        const newest = frame.hubTimeS - (endS ?? frame.hubTimeS);
        const oldest = frame.hubTimeS - startS;
        if (newest >= SPAN_S || oldest <= 0) continue;
        this.#outline(
          welcome?.sensors[sensor]?.station ?? null,
          Math.max(0, newest),
          Math.min(SPAN_S, oldest),
          severity,
        );
      }
    }
  }

  /** @param station null for the whole rig: a bar along the lane's edge */
  #outline(station: number | null, newestS: number, oldestS: number, severity: Severity): void {
    const { top, height, tail } = this.#box;
    const y = (s: number) => top + (s / SPAN_S) * (height - 12);
    const x = station === null ? tail + 4 : stationX(this.#box, station) - 9;
    const width = station === null ? 4 : 18;
    const stroke = { width: 1.5, color: this.#palette![severity] };
    this.#marks.rect(x, y(newestS), width, Math.max(3, y(oldestS) - y(newestS))).stroke(stroke);
  }
}

/** ABGR words, as image data stores them on a little-endian machine: right of the mean line, zero, left. */
function colourScale(palette: Palette): Uint32Array {
  const scale = new Uint32Array(2 * STEPS + 1);
  for (let step = -STEPS; step <= STEPS; step++) {
    // A little above linear, so that small waves ahead show beside large ones behind.
    const strength = (Math.abs(step) / STEPS) ** 0.8;
    const colour = mix(palette.ground, step > 0 ? palette.body[0]! : palette.body[3]!, strength);
    scale[step + STEPS] = 0xff000000 + ((colour & 255) << 16) + (colour & 0xff00) + ((colour >> 16) & 255);
  }
  return scale;
}
