/**
 * What was drawn and how long it took, at window.bendwatchView: the page's own record of its pace, read by tests and
 * benchmarks, and handy when a screen stutters. The last couple of thousand drawings.
 */
import type { RendererName } from "./lanes/renderer.ts";
import { linkWord, type ViewState } from "./stream/view-state.ts";

const KEPT = 2000;

export class DrawLog {
  readonly renderer: RendererName;
  /** Drawings since the page was loaded. */
  drawn = 0;
  /** Time between two drawings, ms. */
  readonly frameIntervalsMs: number[] = [];
  /** Main-thread work of each drawing, ms. */
  readonly workMs: number[] = [];
  /** The midline as last drawn: x,y,z per point, travel axes, m; empty before the first. */
  midline = new Float32Array(0);
  /** Hub time of the midline as last drawn, s. */
  hubTimeS = 0;
  readonly #view: ViewState;
  #lastMs = Number.NaN;

  constructor(renderer: RendererName, view: ViewState) {
    this.renderer = renderer;
    this.#view = view;
    Object.assign(window, { bendwatchView: this });
  }

  get connection(): string {
    return linkWord(this.#view);
  }

  /** Notes that the view was drawn as it is now. */
  add(nowMs: number, workMs: number): void {
    const { frame, runFrameCount } = this.#view;
    if (runFrameCount > 0) {
      if (this.midline.length !== frame.midline.length) this.midline = new Float32Array(frame.midline.length);
      this.midline.set(frame.midline);
      this.hubTimeS = frame.hubTimeS;
    }
    this.drawn++;
    if (!Number.isNaN(this.#lastMs)) keep(this.frameIntervalsMs, nowMs - this.#lastMs);
    keep(this.workMs, workMs);
    this.#lastMs = nowMs;
  }
}

function keep(list: number[], value: number): void {
  list.push(value);
  if (list.length > KEPT) list.shift();
}
