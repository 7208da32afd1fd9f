/** Single keys, and the list of them. Off while text is being typed or a modifier is held. */

export interface KeyAction {
  readonly key: string;
  readonly does: string;
  readonly run: () => void;
}

export class Keys {
  readonly #dialog = document.querySelector<HTMLDialogElement>("#keys")!;

  /** @param closeOpen closes what is open, if anything but the list is */
  constructor(actions: readonly KeyAction[], closeOpen: () => void) {
    const all = [...actions, { key: "?", does: "Show these keys", run: () => this.toggle() }];
    const rows = [...all, { key: "Esc", does: "Close what is open" }];
    this.#dialog.innerHTML = `<h2 id="keys-title">Keys</h2><dl></dl><button type="button" class="button">Close</button>`;
    const list = this.#dialog.querySelector("dl")!;
    for (const { key, does } of rows) {
      const term = document.createElement("dt");
      const kbd = document.createElement("kbd");
      kbd.textContent = key;
      term.append(kbd);
      const meaning = document.createElement("dd");
      meaning.textContent = does;
      list.append(term, meaning);
    }
    this.#dialog.querySelector("button")!.addEventListener("click", () => this.#dialog.close());
    document.querySelector("#keys-button")!.addEventListener("click", () => this.toggle());
    addEventListener("keydown", (event) => {
      if (event.ctrlKey || event.metaKey || event.altKey || event.isComposing) return;
      if (event.key === "Escape") closeOpen();
      else if (!(event.target instanceof HTMLInputElement || event.target instanceof HTMLSelectElement)) {
        const action = all.find(({ key }) => key.toLowerCase() === event.key.toLowerCase());
        if (action === undefined || (this.#dialog.open && action.key !== "?")) return;
        event.preventDefault();
        action.run();
      }
    });
  }

  toggle(): void {
    if (this.#dialog.open) this.#dialog.close();
    else this.#dialog.showModal();
  }
}
