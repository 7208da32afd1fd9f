/** The one-line field in which the operator notes what just happened. A mark that is not kept comes back into it. */
import { type DashboardMessage, MAX_MARK_LENGTH } from "../../bridge/wire/messages.ts";
import { setSeverity } from "../lanes/glyphs.ts";
import type { ViewState } from "../stream/view-state.ts";
import { setText } from "./text.ts";

export class MarkField {
  readonly #form = document.querySelector<HTMLFormElement>("#mark-form")!;
  readonly #input = document.querySelector<HTMLInputElement>("#mark-text")!;
  readonly #hint = document.querySelector<HTMLElement>("#mark-hint")!;
  readonly #button = document.querySelector<HTMLButtonElement>("#mark-button")!;
  #sent = "";
  #refusal: unknown = null;

  /** @param send hands the mark to the bridge; false when there is none */
  constructor(send: (message: DashboardMessage) => boolean) {
    this.#input.maxLength = MAX_MARK_LENGTH;
    this.#button.addEventListener("click", () => this.open());
    this.#form.addEventListener("submit", (event) => {
      event.preventDefault();
      const text = this.#input.value.trim();
      if (text !== "" && !send({ type: "add mark", text })) {
        this.#say("Not kept: there is no bridge now");
        return;
      }
      this.#sent = text;
      this.close();
    });
  }

  /** Gives a mark that the bridge has refused back to the operator, with the reason. */
  update({ refusal }: ViewState): void {
    if (refusal === this.#refusal) return;
    this.#refusal = refusal;
    if (refusal === null) return;
    this.open();
    if (this.#input.value === "") this.#input.value = this.#sent;
    this.#say(`Not kept: ${refusal.reason}`);
  }

  open(): void {
    setSeverity(this.#hint, null);
    setText(this.#hint, "Enter keeps it, Esc leaves it");
    this.#form.hidden = false;
    this.#button.setAttribute("aria-expanded", "true");
    this.#input.focus();
  }

  close(): void {
    if (this.#form.hidden) return;
    this.#form.hidden = true;
    this.#input.value = "";
    this.#button.setAttribute("aria-expanded", "false");
    this.#button.focus();
  }

  #say(text: string): void {
    setSeverity(this.#hint, "caution");
    setText(this.#hint, text);
  }
}
