/** The midline beside a camera's, where a table of the camera's was loaded for a replay: all stations together. */
import type { CameraMessage } from "../../bridge/wire/messages.ts";
import type { ViewState } from "../stream/view-state.ts";
import { millimetres, percent, setText } from "./text.ts";

type Overall = NonNullable<CameraMessage["overall"]>;

const ROWS: readonly {
  readonly name: string;
  readonly meaning: string;
  readonly value: (overall: Overall, lengthM: number) => readonly [string, string];
}[] = [
  {
    name: "Lag",
    meaning: "how long after the camera's midline ours moves sideways",
    value: ({ lagS }) => [`${(lagS * 1000).toFixed(1)} ms`, ""],
  },
  {
    name: "Gain",
    meaning: "sideways amplitude over the camera's",
    value: ({ gain }) => [gain.toFixed(3), ""],
  },
  {
    name: "r²",
    meaning: "correlation squared, with the lag taken off",
    value: ({ r2 }) => [r2.toFixed(3), ""],
  },
  {
    name: "RMSE",
    meaning: "root mean square of the sideways distance; share of the body length L",
    value: ({ rmseM }, lengthM) => [millimetres(rmseM), `${percent(rmseM / lengthM, 2)} L`],
  },
];

export class CameraPanel {
  readonly #host: HTMLElement;
  readonly #cells: readonly (readonly [HTMLElement, HTMLElement])[];

  constructor(host: HTMLElement) {
    this.#host = host;
    host.innerHTML = `<div class="heading"><h2>Beside the camera</h2><span class="soft">so far</span></div>
      <dl class="numbers"></dl>`;
    const list = host.querySelector("dl")!;
    this.#cells = ROWS.map(({ name, meaning }) => {
      const term = document.createElement("dt");
      term.textContent = name;
      term.title = meaning;
      const cells = [document.createElement("dd"), document.createElement("dd")] as const;
      list.append(term, ...cells);
      return cells;
    });
  }

  update({ camera, welcome }: ViewState): void {
    this.#host.hidden = camera === null;
    const overall = camera?.overall ?? null;
    ROWS.forEach(({ value }, i) => {
      const [figure, beside] = overall === null ? ["–", ""] : value(overall, welcome?.lengthM ?? Number.NaN);
      setText(this.#cells[i][0], figure);
      setText(this.#cells[i][1], beside);
    });
  }
}
