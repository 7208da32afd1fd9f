/** One canvas under one element of the page, and the lanes that are drawn on it, each at the place of its own element. */
import { Container, type Renderer } from "pixi.js";
import type { Palette } from "../look/palette.ts";
import type { ViewState } from "../stream/view-state.ts";
import type { Lane, Ruler } from "./lane.ts";
import { screenResolution } from "./renderer.ts";

export interface PlacedLane {
  readonly element: HTMLElement;
  readonly lane: Lane;
}

export class Stage {
  readonly #host: HTMLElement;
  readonly #renderer: Renderer;
  readonly #lanes: readonly PlacedLane[];
  readonly #root = new Container();
  #stale = true;

  constructor(host: HTMLElement, renderer: Renderer, lanes: readonly PlacedLane[]) {
    this.#host = host;
    this.#renderer = renderer;
    this.#lanes = lanes;
    renderer.canvas.setAttribute("aria-hidden", "true");
    host.prepend(renderer.canvas);
    renderer.canvas.addEventListener("webglcontextrestored", () => {
      this.#stale = true;
    });
    for (const { lane } of lanes) this.#root.addChild(lane.container);
  }

  /** Fades all that is drawn: what it shows is no longer so. */
  set dimmed(dimmed: boolean) {
    // On the element: pieces that overlap would shine through one another if each was faded.
    this.#renderer.canvas.classList.toggle("dimmed", dimmed);
  }

  resize(ruler: Ruler, palette: Palette): void {
    const { clientWidth, clientHeight } = this.#host;
    this.#renderer.resize(Math.max(1, clientWidth), Math.max(1, clientHeight), screenResolution());
    for (const { element, lane } of this.#lanes) {
      const { offsetLeft, offsetTop, offsetWidth, offsetHeight } = element;
      const box =
        element === this.#host
          ? { left: 0, top: 0, width: clientWidth, height: clientHeight }
          : { left: offsetLeft, top: offsetTop, width: offsetWidth, height: offsetHeight };
      lane.resize(box, ruler, palette);
    }
    this.#stale = true;
  }

  draw(view: ViewState): void {
    for (const { lane } of this.#lanes) if (lane.draw(view)) this.#stale = true;
    if (!this.#stale) return;
    this.#stale = false;
    this.#renderer.render(this.#root);
  }
}
