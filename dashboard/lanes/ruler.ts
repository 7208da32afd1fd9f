/** The ruler from nose to tail, with a mark in the body's colour and a name for each sensor. */
import { Container, Graphics } from "pixi.js";
import type { ViewState } from "../stream/view-state.ts";
import { type Box, type Lane, stationX, Ticks } from "./lane.ts";
import { bodyColour, type Palette } from "./palette.ts";

/** The line lies so far below the lane's top. */
const LINE_Y = 28;
const NAME_Y = 48;
/** Names keep this far apart, CSS pixels. */
const NAME_GAP = 8;

export class RulerLane implements Lane {
  readonly shapes = new Container();
  readonly #line = new Graphics();
  readonly #ticks = new Ticks("lane-ruler");
  readonly #names = document.querySelector<HTMLElement>("#names")!;
  readonly #length = document.querySelector<HTMLElement>("#body-length")!;

  constructor() {
    this.shapes.addChild(this.#line);
  }

  place(box: Box, palette: Palette, { welcome }: ViewState): void {
    const y = Math.round(box.top + LINE_Y) + 0.5;
    const line = this.#line.clear().moveTo(box.nose, y).lineTo(box.tail, y);
    const ticks = [];
    for (let percent = 0; percent <= 100; percent += 2) {
      const x = Math.round(stationX(box, percent / 100)) + 0.5;
      line.moveTo(x, y).lineTo(x, y - (percent % 20 === 0 ? 8 : percent % 10 === 0 ? 6 : 3));
      if (percent % 20 !== 0) continue;
      const text = percent === 0 ? "nose" : percent === 100 ? "tail" : `${percent} %`;
      ticks.push({ text, x, y: 3, align: "middle" as const });
    }
    line.stroke({ width: 1, color: palette.soft });
    this.#ticks.show(ticks);
    this.#length.textContent = welcome === null ? "" : `${Math.round(welcome.lengthM * 1000)} mm`;
    const size = (welcome?.sensors.length ?? 0) > 24 ? 3.5 : 6;
    for (const { station } of welcome?.sensors ?? []) {
      const x = stationX(box, station);
      line
        .poly([x, y + 5, x + size, y + 5 + size * 1.8, x - size, y + 5 + size * 1.8])
        .fill(bodyColour(palette, station));
    }
    this.#showNames(box, welcome?.sensors ?? []);
  }

  draw(): void {}

  /** Names nose to tail; one that would touch the one before is left out (its column still tells it). */
  #showNames(box: Box, sensors: readonly { name: string; station: number }[]): void {
    this.#names.replaceChildren();
    let free = Number.NEGATIVE_INFINITY;
    for (const { name, station } of sensors) {
      const span = document.createElement("span");
      span.textContent = name;
      span.style.top = `${NAME_Y}px`;
      this.#names.append(span);
      const half = span.offsetWidth / 2;
      // Long names near the ends stay on the page.
      const right = this.#names.parentElement!.clientWidth - 4;
      const x = Math.min(Math.max(stationX(box, station), half + 4), right - half);
      if (x - half < free) {
        span.remove();
        continue;
      }
      span.style.left = `${x}px`;
      free = x + half + NAME_GAP;
    }
  }
}
