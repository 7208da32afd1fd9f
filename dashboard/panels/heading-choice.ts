/** What holds the headings: the operator's choice, and a word when something else holds them at present. */
import type { DashboardMessage, HeadingView } from "../../bridge/wire/messages.ts";
import type { ViewState } from "../stream/view-state.ts";
import { setText } from "./text.ts";

/** What there is to say of headings that no magnetometer holds. */
const WORDS: Record<HeadingView, string> = {
  magnetic: "",
  relative: "Heading: held by the body",
  free: "Heading drifts: gyroscopes only",
};

export class HeadingChoice {
  readonly #select = document.querySelector<HTMLSelectElement>("#heading")!;
  readonly #note = document.querySelector<HTMLElement>("#heading-note")!;

  /** @param send hands the choice to the bridge; false when there is none */
  constructor(send: (message: DashboardMessage) => boolean) {
    this.#select.addEventListener("change", () => {
      send({ type: "choose", heading: this.#select.value as HeadingView });
    });
  }

  focus(): void {
    this.#select.focus();
  }

  update({ status, welcome }: ViewState): void {
    const present = status?.heading ?? welcome?.heading ?? "magnetic";
    const chosen = status?.chosenHeading ?? present;
    // Not under the operator's fingers: the bridge's word of half a second ago must not undo the choice of now.
    if (document.activeElement !== this.#select && this.#select.value !== chosen) this.#select.value = chosen;
    this.#note.dataset.heading = present;
    setText(this.#note, WORDS[present]);
  }
}
