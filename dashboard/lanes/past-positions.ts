/**
 * Where the midline was in the last tailbeat: twelve positions, evenly spaced in the beat, fading with age. They stand
 * still between two twelfths of a beat, so they are redrawn a dozen times a beat and not sixty times a second.
 */
import { Container, Graphics } from "pixi.js";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, stationX } from "./lane.ts";
import type { Palette } from "./palette.ts";

const POSITIONS = 12;
/** Spacing when the body does not beat, s. */
const RESTING_STEP_S = 0.15;

export class PastPositions {
  readonly shapes = new Container();
  readonly #lines = Array.from({ length: POSITIONS }, () => this.shapes.addChild(new Graphics()));
  #next = 0;
  #lastS = Number.NEGATIVE_INFINITY;

  forget(): void {
    for (const line of this.#lines) line.clear();
    this.#lastS = Number.NEGATIVE_INFINITY;
  }

  draw({ frame, status }: ViewState, box: Box, middle: number, scale: number, palette: Palette): void {
    const frequency = status?.tailbeat.frequencyHz ?? null;
    const stepS = frequency === null ? RESTING_STEP_S : 1 / frequency / POSITIONS;
    if (frame.hubTimeS - this.#lastS < stepS) return;
    this.#lastS = frame.hubTimeS;
    const line = this.#lines[this.#next]!.clear();
    const last = frame.pointCount - 1;
    line.moveTo(stationX(box, 0), middle - frame.midline[1]! * scale);
    for (let point = 1; point <= last; point++) {
      line.lineTo(stationX(box, point / last), middle - frame.midline[3 * point + 1]! * scale);
    }
    line.stroke({ width: 1, color: palette.soft });
    this.#next = (this.#next + 1) % POSITIONS;
    // The oldest is faintest.
    for (let age = 0; age < POSITIONS; age++) {
      const index = (this.#next - 1 - age + 2 * POSITIONS) % POSITIONS;
      this.#lines[index]!.alpha = 0.5 * (1 - age / POSITIONS);
    }
  }
}
