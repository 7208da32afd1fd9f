/** Text beside the drawings. It is DOM, so that it can be read aloud, selected and enlarged; spans are reused. */

export type Anchor = "left" | "middle" | "right";

export class Labels {
  readonly #host: HTMLElement;
  readonly #className: string;
  readonly #spans: HTMLSpanElement[] = [];
  #used = 0;

  /** @param host positioned element whose top left corner the places count from */
  constructor(host: HTMLElement, className: string) {
    this.#host = host;
    this.#className = className;
  }

  begin(): void {
    this.#used = 0;
  }

  /** Puts text at a place, CSS pixels; vertically centred on `y`. */
  put(text: string, x: number, y: number, anchor: Anchor): void {
    let span = this.#spans[this.#used];
    if (span === undefined) {
      span = document.createElement("span");
      this.#spans.push(span);
      this.#host.append(span);
    }
    this.#used++;
    span.className = `label ${anchor} ${this.#className}`;
    span.style.left = `${x}px`;
    span.style.top = `${y}px`;
    if (span.textContent !== text) span.textContent = text;
    span.hidden = false;
  }

  end(): void {
    for (let i = this.#used; i < this.#spans.length; i++) this.#spans[i].hidden = true;
  }
}
