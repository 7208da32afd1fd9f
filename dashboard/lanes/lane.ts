/**
 * What every lane is: a strip of the page that draws one thing on the shared ruler. Lanes draw with what both of Pixi's
 * renderers can do: shapes and sprites. Lengths are CSS pixels.
 */
import type { Container } from "pixi.js";
import type { ViewState } from "../stream/view-state.ts";
import type { Palette } from "./palette.ts";

export interface Box {
  readonly top: number;
  readonly height: number;
  /** Where the nose and the tail tip lie on the ruler. */
  readonly nose: number;
  readonly tail: number;
}

export interface Lane {
  readonly shapes: Container;
  /** The lane's place, light or rig changed: draw all that stands still. */
  place(box: Box, palette: Palette, view: ViewState): void;
  /** A new frame: draw what moves. Called at most once a display frame. */
  draw(view: ViewState, nowMs: number): void;
}

export function stationX({ nose, tail }: Box, station: number): number {
  return nose + station * (tail - nose);
}

/** The least of 1, 2, 5 x 10^n that is at least `value`. */
export function roundStep(value: number): number {
  const power = 10 ** Math.floor(Math.log10(value));
  for (const factor of [1, 2, 5]) if (factor * power >= value * (1 - 1e-9)) return factor * power;
  return 10 * power;
}

/** Text beside a lane: keeps its elements and rewrites only what changed. Positions are within the lane's own section. */
export class Ticks {
  readonly #parent: HTMLElement;
  readonly #spans: HTMLSpanElement[] = [];

  constructor(section: string) {
    this.#parent = document.querySelector<HTMLElement>(`#${section} .ticks`)!;
  }

  show(ticks: readonly { text: string; x: number; y: number; align: "left" | "middle" }[]): void {
    while (this.#spans.length > ticks.length) this.#spans.pop()!.remove();
    ticks.forEach((tick, i) => {
      const span = this.#spans[i] ?? this.#parent.appendChild(document.createElement("span"));
      this.#spans[i] = span;
      if (span.textContent !== tick.text) span.textContent = tick.text;
      span.className = tick.align;
      span.style.left = `${tick.x}px`;
      span.style.top = `${tick.y}px`;
    });
  }
}
