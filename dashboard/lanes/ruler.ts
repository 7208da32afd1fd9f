/** The ruler from nose to tail with a triangle and a name where each sensor sits. Drawn once; changes with the rig only. */
import { Container, Graphics } from "pixi.js";
import { bodyColour, type Palette } from "../look/palette.ts";
import { setText } from "../panels/text.ts";
import type { ViewState } from "../stream/view-state.ts";
import { Labels } from "./labels.ts";
import { type Box, type Lane, type Ruler, stationX } from "./lane.ts";

/** Places within the lane, pixels from its top. */
const LABEL_Y = 14;
const LINE_Y = 32;
const TRIANGLE_Y = 37;

export class RulerLane implements Lane {
  readonly container = new Container();
  readonly #graphics = new Graphics();
  readonly #labels: Labels;
  readonly #lengthText: HTMLElement;
  #box: Box = { left: 0, top: 0, width: 0, height: 0 };
  #ruler: Ruler = { left: 0, width: 0 };
  #palette: Palette | undefined;
  #drawnFor: unknown;

  constructor(section: HTMLElement) {
    this.#labels = new Labels(section, "axis");
    this.#lengthText = section.querySelector("#ruler-length")!;
    this.container.addChild(this.#graphics);
  }

  resize(box: Box, ruler: Ruler, palette: Palette): void {
    this.#box = box;
    this.#ruler = ruler;
    this.#palette = palette;
    this.#drawnFor = undefined;
  }

  draw(view: ViewState): boolean {
    if (this.#palette === undefined || this.#drawnFor === view.welcome) return false;
    this.#drawnFor = view.welcome;
    this.#graphics.clear();
    this.#drawScale(this.#palette);
    const sensors = view.welcome?.sensors ?? [];
    const half = sensors.length > 24 ? 4 : 6;
    const y = this.#box.top + TRIANGLE_Y;
    for (const { station } of sensors) {
      const x = stationX(this.#ruler, station);
      this.#graphics
        .poly([x, y, x + half, y + 1.8 * half, x - half, y + 1.8 * half])
        .fill(bodyColour(this.#palette.body, station));
    }
    setText(this.#lengthText, view.welcome === null ? "" : lengthText(view.welcome.lengthM));
    return true;
  }

  #drawScale(palette: Palette): void {
    const y = Math.round(this.#box.top + LINE_Y) + 0.5;
    const { left, width } = this.#ruler;
    this.#graphics.moveTo(left, y).lineTo(left + width, y);
    this.#labels.begin();
    for (let k = 0; k <= 50; k++) {
      const x = left + (k / 50) * width;
      const length = k % 10 === 0 ? 9 : k % 5 === 0 ? 6 : 3;
      this.#graphics.moveTo(x, y).lineTo(x, y - length);
      if (k % 10 !== 0) continue;
      const text = k === 0 ? "nose" : k === 50 ? "tail" : `${2 * k} %`;
      this.#labels.put(text, x, LABEL_Y, "middle");
    }
    this.#labels.end();
    this.#graphics.stroke({ width: 1, color: palette.soft });
  }
}

function lengthText(m: number): string {
  return m < 2 ? `${Math.round(m * 1000)} mm` : `${m.toFixed(2)} m`;
}
