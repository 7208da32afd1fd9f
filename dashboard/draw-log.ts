/**
 * What was drawn and how long it took, at window.bendwatchView: the page's own record of its pace, read by tests and
 * benchmarks, and handy when a screen stutters. The last couple of thousand frames.
 */
import type { RendererName } from "./lanes/renderer.ts";
import { linkWord } from "./panels/header.ts";
import type { ViewState } from "./stream/view-state.ts";

const KEPT = 2000;

export class DrawLog {
  readonly renderer: RendererName;
  /** Frames drawn since the page was loaded. */
  drawn = 0;
  /** Time between two drawings, ms. */
  readonly frameIntervalsMs: number[] = [];
  /** Main-thread work of each drawing, ms. */
  readonly workMs: number[] = [];
  readonly #view: ViewState;
  #lastMs = Number.NaN;

  constructor(renderer: RendererName, view: ViewState) {
    this.renderer = renderer;
    this.#view = view;
    Object.assign(window, { bendwatchView: this });
  }

  /** The midline as last drawn: x,y,z per point, travel axes, m. */
  get midline(): Float32Array {
    return this.#view.frame.midline;
  }

  get hubTimeS(): number {
    return this.#view.frame.hubTimeS;
  }

  get connection(): string {
    return linkWord(this.#view);
  }

  add(nowMs: number, workMs: number): void {
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
