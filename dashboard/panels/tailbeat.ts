/** The tailbeat in numbers: frequency large, how long it has been steady, amplitude, and Strouhal number in a flow. */
import type { FlagKind } from "../../bridge/wire/flag.ts";
import type { TailbeatView } from "../../bridge/wire/messages.ts";
import { isLive, type ViewState } from "../stream/view-state.ts";
import { count, flagTitle, millimetres, percent, setText } from "./text.ts";

interface Row {
  readonly name: string;
  readonly value: string;
  readonly beside: string;
  /** What is meant exactly; shown on pointing at the name. */
  readonly meaning: string;
}

export class TailbeatPanel {
  readonly #frequency: HTMLElement;
  readonly #unit: HTMLElement;
  readonly #steady: HTMLElement;
  readonly #steadyFor: HTMLElement;
  readonly #rows: HTMLElement;

  constructor(host: HTMLElement) {
    host.innerHTML = `<h2>Tailbeat</h2>
      <div class="beat"><p><span class="large"></span><span class="unit soft">Hz</span></p>
      <p class="steady"><strong></strong><span class="soft"></span></p></div>
      <dl class="numbers"></dl>
      <p class="against soft">Amplitude against the nose</p>`;
    this.#frequency = host.querySelector(".large")!;
    this.#unit = host.querySelector(".unit")!;
    this.#steady = host.querySelector(".steady strong")!;
    this.#steadyFor = host.querySelector(".steady span")!;
    this.#rows = host.querySelector("dl")!;
  }

  update(view: ViewState): void {
    const beat = view.runFrameCount > 0 ? view.status?.tailbeat : undefined;
    const frequency = beat?.frequencyHz ?? null;
    setText(this.#frequency, frequency === null ? "–" : frequency.toFixed(2));
    this.#unit.hidden = frequency === null;
    const [word, why] = beat === undefined ? ["", ""] : steadiness(view, beat);
    setText(this.#steady, word);
    setText(this.#steadyFor, why);
    this.#show(rowsFor(view, frequency, beat?.tailAmplitudeM ?? null));
  }

  /** Three elements a row: what, how much, and beside it. */
  #show(rows: readonly Row[]): void {
    const cells = this.#rows.children;
    while (cells.length > 3 * rows.length) this.#rows.lastElementChild!.remove();
    while (cells.length < 3 * rows.length) {
      this.#rows.append(document.createElement(cells.length % 3 === 0 ? "dt" : "dd"));
    }
    rows.forEach(({ name, value, beside, meaning }, i) => {
      setText(cells[3 * i]!, name);
      (cells[3 * i] as HTMLElement).title = meaning;
      setText(cells[3 * i + 1]!, value);
      setText(cells[3 * i + 2]!, beside);
    });
  }
}

function rowsFor(view: ViewState, frequencyHz: number | null, amplitudeM: number | null): Row[] {
  const lengthM = view.welcome?.lengthM ?? Number.NaN;
  const flow = view.welcome?.flowMPerS ?? null;
  const rows = [
    {
      name: "Tail amplitude",
      value: amplitudeM === null ? "–" : millimetres(amplitudeM),
      beside: amplitudeM === null ? "" : `${percent(amplitudeM / lengthM, 1)} L`,
      meaning: "peak to peak, against the nose; share of the body length L",
    },
  ];
  if (flow === null || flow <= 0) return rows;
  const known = frequencyHz !== null && amplitudeM !== null;
  rows.push({
    name: "Strouhal number",
    value: known ? ((frequencyHz * amplitudeM) / flow).toFixed(2) : "–",
    beside: `at ${flow.toFixed(2)} m/s`,
    meaning: "frequency times tail amplitude over flow speed",
  });
  return rows;
}

/** Beats in a row that agree before the swimming is called steady. */
const STEADY_BEATS = 3;

/** In a word, what the numbers are worth, and in a few more, why. */
function steadiness(view: ViewState, beat: TailbeatView): readonly [string, string] {
  const beating = beat.frequencyHz !== null;
  if (!isLive(view)) return [beating ? "last seen" : "", ""];
  if (!beating) return ["no beat", ""];
  const doubt = tailDoubt(view);
  if (doubt !== null) return ["doubtful", doubt];
  const { steadyBeats } = beat;
  return steadyBeats >= STEADY_BEATS
    ? ["steady", `for ${count(steadyBeats, "beat", "beats")}`]
    : ["changing", ""];
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
