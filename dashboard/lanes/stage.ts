/** The canvas with all lanes on it: places them under one ruler, and draws once a display frame. */
import { Container, type Renderer } from "pixi.js";
import type { ViewState } from "../stream/view-state.ts";
import { AboveLane } from "./above.ts";
import type { Box, Lane } from "./lane.ts";
import { type Palette, readPalette } from "./palette.ts";
import { createRenderer, type RendererName } from "./renderer.ts";
import { RulerLane } from "./ruler.ts";
import { SideLane } from "./side.ts";
import { StripLane } from "./strip.ts";
import { WaveLane } from "./wave.ts";

export class Stage {
  readonly rendererName: RendererName;
  readonly #renderer: Renderer;
  readonly #root = new Container();
  readonly #host = document.querySelector<HTMLElement>("#lanes")!;
  readonly #lanes: readonly { readonly section: HTMLElement; readonly lane: Lane }[];
  #palette: Palette = readPalette();
  /** Where nose and tail lie, for the columns beneath the ruler. */
  ruler = { nose: 0, tail: 0 };

  static async create(wanted: string | null): Promise<Stage> {
    const { renderer, name } = await createRenderer(wanted);
    return new Stage(renderer, name);
  }

  private constructor(renderer: Renderer, name: RendererName) {
    this.#renderer = renderer;
    this.rendererName = name;
    this.#host.prepend(renderer.canvas);
    this.#lanes = [
      { section: "lane-above", lane: new AboveLane() },
      { section: "lane-side", lane: new SideLane() },
      { section: "lane-ruler", lane: new RulerLane() },
      { section: "lane-wave", lane: new WaveLane() },
      { section: "lane-strip", lane: new StripLane() },
    ].map(({ section, lane }) => ({ section: document.getElementById(section)!, lane }));
    for (const { lane } of this.#lanes) this.#root.addChild(lane.shapes);
  }

  /** Takes over the page's size, light and rig: everything that stands still is drawn anew. */
  place(view: ViewState): void {
    this.#palette = readPalette();
    const { clientWidth, clientHeight } = this.#host;
    this.#renderer.resize(clientWidth, clientHeight);
    const style = getComputedStyle(this.#host);
    const length = (name: string) => Number.parseFloat(style.getPropertyValue(name));
    this.ruler = { nose: length("--gutter"), tail: clientWidth - length("--edge") };
    for (const { section, lane } of this.#lanes) {
      const box: Box = { top: section.offsetTop, height: section.clientHeight, ...this.ruler };
      lane.place(box, this.#palette, view);
    }
  }

  draw(view: ViewState, nowMs: number): void {
    const live = view.live || !view.hasFrame ? "yes" : "no";
    if (this.#host.dataset.live !== live) this.#host.dataset.live = live;
    for (const { lane } of this.#lanes) lane.draw(view, nowMs);
    this.#renderer.render(this.#root);
  }
}
