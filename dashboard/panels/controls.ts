/** Buttons and keys: mark, light, list of keys. */

const KEYS: readonly (readonly [string, string])[] = [
  ["M", "Set a mark; Enter keeps it, Esc drops it"],
  ["L", "Dark room or daylight"],
  ["?", "This list"],
  ["Tab", "Next control, then sensor by sensor"],
  ["Esc", "Close"],
];
const LIGHT_KEY = "bendwatch.light";

export interface ControlsOptions {
  /** @returns false when it could not be sent */
  readonly sendMark: (text: string) => boolean;
  readonly onLight: () => void;
}

export class Controls {
  readonly #options: ControlsOptions;
  readonly #form = document.getElementById("mark-form") as HTMLFormElement;
  readonly #text = document.getElementById("mark-text") as HTMLInputElement;
  readonly #button = document.getElementById("mark-button") as HTMLButtonElement;
  readonly #keys = document.getElementById("keys") as HTMLDialogElement;

  constructor(options: ControlsOptions) {
    this.#options = options;
    document.documentElement.dataset.light = localStorage.getItem(LIGHT_KEY) ?? preferredLight();
    this.#listKeys();
    this.#button.onclick = () => this.#openMark();
    (document.getElementById("light-button") as HTMLElement).onclick = () => this.#switchLight();
    (document.getElementById("keys-button") as HTMLElement).onclick = () => this.#keys.showModal();
    this.#form.onsubmit = (event) => {
      event.preventDefault();
      this.#sendMark();
    };
    this.#text.onkeydown = (event) => {
      if (event.key === "Escape") this.#closeMark();
    };
    document.addEventListener("keydown", (event) => this.#key(event));
  }

  #key(event: KeyboardEvent): void {
    const typing = event.target instanceof HTMLInputElement;
    if (typing || event.ctrlKey || event.altKey || event.metaKey || this.#keys.open) return;
    const key = event.key.toLowerCase();
    if (key === "m") this.#openMark();
    else if (key === "l") this.#switchLight();
    else if (key === "?") this.#keys.showModal();
    else return;
    event.preventDefault();
  }

  #openMark(): void {
    this.#form.hidden = false;
    this.#button.hidden = true;
    this.#text.focus();
  }

  #closeMark(): void {
    this.#form.hidden = true;
    this.#button.hidden = false;
    this.#text.value = "";
    this.#text.setCustomValidity("");
    this.#button.focus();
  }

  #sendMark(): void {
    const text = this.#text.value.trim();
    if (text !== "" && !this.#options.sendMark(text)) {
      this.#text.setCustomValidity("The bridge is not there: the mark was not kept.");
      this.#text.reportValidity();
      this.#text.setCustomValidity("");
      return;
    }
    this.#closeMark();
  }

  #switchLight(): void {
    const { dataset } = document.documentElement;
    dataset.light = dataset.light === "dark" ? "day" : "dark";
    localStorage.setItem(LIGHT_KEY, dataset.light);
    this.#options.onLight();
  }

  #listKeys(): void {
    const list = this.#keys.querySelector("dl") as Element;
    for (const [key, does] of KEYS) {
      const term = document.createElement("dt");
      const meaning = document.createElement("dd");
      term.textContent = key;
      meaning.textContent = does;
      list.append(term, meaning);
    }
  }
}

function preferredLight(): "dark" | "day" {
  return matchMedia("(prefers-color-scheme: light)").matches ? "day" : "dark";
}
