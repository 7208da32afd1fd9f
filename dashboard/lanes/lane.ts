/** What all lanes have in common: their place on the canvas, the one ruler, and when they are asked to draw. */
import type { Container } from "pixi.js";
import type { Palette } from "../look/palette.ts";
import type { ViewState } from "../stream/view-state.ts";

/** A rectangle on the canvas, CSS pixels. */
export interface Box {
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly height: number;
}

/** The one ruler from nose to tail, CSS pixels. */
export interface Ruler {
  readonly left: number;
  readonly width: number;
}

/** Where a station (0 nose, 1 tail tip) lies on the canvas. */
export function stationX(ruler: Ruler, station: number): number {
  return ruler.left + station * ruler.width;
}

export interface Lane {
  readonly container: Container;
  /** Takes its place and colours; draws all that stays. Followed by a draw. */
  resize(box: Box, ruler: Ruler, palette: Palette): void;
  /** Draws what is new in the view since the last call, once a display frame. @returns whether anything was */
  draw(view: ViewState): boolean;
}
