/** Tailbeat numbers. */
import type { FlagKind } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { flagTitle } from "./flags.ts";
import { setText } from "./words.ts";

const NONE = "–";

export class TailbeatPanel {
  readonly #frequency: Element;
  readonly #steady: Element;
  readonly #beats: Element;
  readonly #figures: Element;
  /** Label, value and relation of each figure, for rewriting in place. */
  readonly #cells: Element[] = [];

  constructor() {
    const section = document.getElementById("tailbeat") as HTMLElement;
    section.innerHTML = `<h2>Tailbeat</h2>
      <div class="headline"><span><b></b> <small>Hz</small></span><div><strong></strong><span></span></div></div>
      <dl class="figures"></dl>`;
    this.#frequency = section.querySelector("b") as Element;
    this.#steady = section.querySelector("strong") as Element;
    this.#beats = section.querySelector(".headline div span") as Element;
    this.#figures = section.querySelector("dl") as Element;
  }

  draw(view: ViewState): void {
    const { status, welcome } = view;
    const tailbeat = status?.tailbeat;
    const frequency = tailbeat?.frequencyHz ?? null;
    const amplitude = tailbeat?.tailAmplitudeM ?? null;
    const beats = tailbeat?.steadyBeats ?? 0;
    setText(this.#frequency, frequency === null ? NONE : frequency.toFixed(2));
    const [word, why] = steadiness(view, beats);
    setText(this.#steady, word);
    setText(this.#beats, why);
    const lengthM = welcome?.lengthM ?? 0;
    const flow = welcome?.flowMPerS ?? null;
    const figures = [
      [
        "Tail amplitude",
        amplitude === null ? NONE : `${Math.round(amplitude * 1000)} mm`,
        amplitude === null || lengthM === 0 ? "" : `${((100 * amplitude) / lengthM).toFixed(1)} % L`,
      ],
    ];
    if (flow !== null && flow > 0) {
      const strouhal =
        frequency === null || amplitude === null ? NONE : ((frequency * amplitude) / flow).toFixed(2);
      figures.push(["Strouhal number", strouhal, `at ${flow.toFixed(2)} m/s`]);
    }
    this.#show(figures.flat());
  }

  #show(texts: readonly string[]): void {
    while (this.#cells.length < texts.length) {
      const tag = this.#cells.length % 3 === 0 ? "dt" : "dd";
      this.#cells.push(this.#figures.appendChild(document.createElement(tag)));
    }
    while (this.#cells.length > texts.length) this.#cells.pop()?.remove();
    texts.forEach((text, i) => {
      setText(this.#cells[i] as Element, text);
    });
  }
}

/** Beats in a row that agree before the swimming is called steady. */
const STEADY_BEATS = 3;

/** In a word, what the numbers are worth, and in a few more, why. */
function steadiness(view: ViewState, beats: number): readonly [string, string] {
  const beating = (view.status?.tailbeat.frequencyHz ?? null) !== null;
  if (!view.live) return [beating ? "last seen" : "", ""];
  if (!beating) return ["no beat", ""];
  const doubt = tailDoubt(view);
  if (doubt !== null) return ["doubtful", doubt];
  return beats >= STEADY_BEATS ? ["steady", `for ${beats} beats`] : ["changing", ""];
}

/** Kinds of trouble that bend the tail itself. */
const BENDING: readonly FlagKind[] = [
  "gyro saturation",
  "accel saturation",
  "stuck axis",
  "sensor read errors",
];

/** Why the tail's numbers are not to be trusted: trouble at either of the two sensors nearest the tail tip; or null. */
function tailDoubt(view: ViewState): string | null {
  const count = view.welcome?.sensors.length ?? 0;
  const flag = view.flags.open.find(({ kind, sensor }) => sensor >= count - 2 && BENDING.includes(kind));
  return flag === undefined ? null : flagTitle(view, flag);
}
