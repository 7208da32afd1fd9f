/** The tailbeat in numbers: frequency large, how long it has been steady, and every other gait number in a row. */
import type { FlagKind } from "../../bridge/wire/flag.ts";
import type { TailbeatView } from "../../bridge/wire/messages.ts";
import { setGlyph } from "../lanes/glyphs.ts";
import { isLive, type ViewState } from "../stream/view-state.ts";
import { FREQUENCY_MEANING, type GaitRow, gaitRows } from "./gait-rows.ts";
import { count, flagTitle, setText } from "./text.ts";

export class TailbeatPanel {
  readonly #frequency: HTMLElement;
  readonly #unit: HTMLElement;
  readonly #steady: HTMLElement;
  readonly #steadyFor: HTMLElement;
  readonly #rows: HTMLElement;
  readonly #against: HTMLElement;

  constructor(host: HTMLElement) {
    host.innerHTML = `<h2>Tailbeat</h2>
      <div class="beat"><p><span class="large"></span><span class="unit soft">Hz</span></p>
      <p class="steady"><strong></strong><span class="soft"></span></p></div>
      <dl class="numbers"></dl>
      <p class="against soft"></p>`;
    this.#frequency = host.querySelector(".large")!;
    this.#frequency.title = FREQUENCY_MEANING;
    this.#unit = host.querySelector(".unit")!;
    this.#steady = host.querySelector(".steady strong")!;
    this.#steadyFor = host.querySelector(".steady span")!;
    this.#rows = host.querySelector("dl")!;
    this.#against = host.querySelector(".against")!;
  }

  update(view: ViewState): void {
    const beat = view.runFrameCount > 0 ? view.status?.tailbeat : undefined;
    const frequency = beat?.numbers.frequencyHz.value ?? null;
    setText(this.#frequency, frequency === null ? "–" : frequency.toFixed(2));
    this.#unit.hidden = frequency === null;
    const [word, why] = beat === undefined ? ["", ""] : steadiness(view, beat);
    setText(this.#steady, word);
    setText(this.#steadyFor, why);
    const amplitudes = view.status?.noseMoves
      ? "Amplitudes include the nose's sway"
      : "Amplitudes against the nose";
    setText(this.#against, `${amplitudes}; ± from beat to beat`);
    this.#show(gaitRows(beat?.numbers, view.welcome?.lengthM ?? Number.NaN));
  }

  /** Three elements a row: what, how much, and beside it its scatter, or what is against it. */
  #show(rows: readonly GaitRow[]): void {
    if (this.#rows.childElementCount === 0) {
      const cells = "<dt></dt><dd></dd><dd><span class='glyph'></span><span class='words'></span></dd>";
      this.#rows.innerHTML = cells.repeat(rows.length);
    }
    const cells = this.#rows.children;
    rows.forEach(({ name, value, beside, doubt, meaning }, i) => {
      const [what, number, more] = [cells[3 * i], cells[3 * i + 1], cells[3 * i + 2]] as HTMLElement[];
      setText(what, name);
      what.title = meaning;
      setText(number, value);
      number.classList.toggle("doubted", doubt !== "" && value !== "–");
      setGlyph(more.querySelector(".glyph")!, doubt === "" || value === "–" ? null : "caution");
      setText(more.querySelector(".words")!, doubt === "" ? beside : doubt);
    });
  }
}

/** In a word, what the numbers are worth, and in a few more, why. */
function steadiness(view: ViewState, beat: TailbeatView): readonly [string, string] {
  const { steadyCycles, steady, numbers } = beat;
  const beating = numbers.frequencyHz.value !== null;
  if (!isLive(view)) return [beating ? "last seen" : "", ""];
  if (!beating) return ["no beat", ""];
  const doubt = tailDoubt(view);
  if (doubt !== null) return ["doubtful", doubt];
  return steady ? ["steady", `for ${count(steadyCycles, "beat", "beats")}`] : ["changing", ""];
}

/** Kinds of trouble that bend the tail itself. */
const BENDING: readonly FlagKind[] = [
  "gyro saturation",
  "accel saturation",
  "stuck axis",
  "sensor read errors",
];

/** Why the tail's numbers are not to be trusted: trouble at either of the two sensors nearest the tail tip; or null. */
function tailDoubt({ flags, welcome }: ViewState): string | null {
  const sensors = welcome?.sensors.length ?? 0;
  const flag = flags?.open.find(({ kind, sensor }) => sensor >= sensors - 2 && BENDING.includes(kind));
  return flag === undefined ? null : flagTitle(flag, welcome);
}
