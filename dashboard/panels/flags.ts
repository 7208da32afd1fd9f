/** What is wrong now, newest first, with advice; beneath it what has ended, and the marks. */
import type { Flag, Mark } from "../../bridge/wire/flag.ts";
import { setGlyph } from "../lanes/glyphs.ts";
import { hubTimeNow, isLive, type ViewState } from "../stream/view-state.ts";
import { duration, flagTitle, setText, unbroken } from "./text.ts";

const ENDED_SHOWN = 8;
const MARKS_SHOWN = 8;

export class FlagsPanel {
  readonly #count = document.querySelector<HTMLElement>("#flag-count")!;
  readonly #calm = document.querySelector<HTMLElement>("#all-well")!;
  readonly #open = document.querySelector<HTMLElement>("#open")!;
  readonly #past = document.querySelector<HTMLElement>("#past")!;
  readonly #ended = document.querySelector<HTMLElement>("#ended")!;
  readonly #marks = document.querySelector<HTMLElement>("#marks")!;
  readonly #speech = document.querySelector<HTMLElement>("#alarm")!;
  /** Elements of the open flags: a flag keeps its own while it lasts, so that a reader's place is not lost. */
  readonly #rows = new Map<number, HTMLElement>();
  /** Alarms already spoken. */
  readonly #spoken = new Set<number>();

  update(view: ViewState, nowMs: number): void {
    const open = view.flags?.open ?? [];
    const nowS = hubTimeNow(view, nowMs);
    setText(this.#count, open.length === 0 ? "" : `${open.length} open`);
    setText(this.#calm, open.length > 0 ? "" : calmSentence(view));
    this.#showOpen(open, view, nowS);
    this.#speak(open, view);
    const ended = (view.flags?.ended ?? []).slice(0, ENDED_SHOWN);
    const marks = (view.marks?.marks ?? []).slice(0, MARKS_SHOWN);
    this.#past.hidden = ended.length + marks.length === 0;
    showPast(this.#ended, ended, (flag) => [
      flagTitle(flag, view.welcome),
      `${duration(nowS - (flag.endS ?? nowS))} ago, ended`,
    ]);
    showPast(this.#marks, marks, (mark) => [markTitle(mark), `${duration(nowS - mark.timeS)} ago`]);
  }

  /** A new run counts its flags from one again. */
  forget(): void {
    this.#spoken.clear();
  }

  #showOpen(open: readonly Flag[], view: ViewState, nowS: number): void {
    for (const [id, row] of this.#rows) {
      if (open.some((flag) => flag.id === id)) continue;
      row.remove();
      this.#rows.delete(id);
    }
    open.forEach((flag, place) => {
      const row = this.#rows.get(flag.id) ?? createRow();
      this.#rows.set(flag.id, row);
      const there = this.#open.children[place] ?? null;
      if (there !== row) this.#open.insertBefore(row, there);
      row.dataset.kind = flag.kind;
      row.dataset.severity = flag.severity;
      setGlyph(row.querySelector(".glyph")!, flag.severity);
      setText(row.querySelector(".title")!, flagTitle(flag, view.welcome));
      const long = duration(nowS - flag.startS);
      setText(row.querySelector(".detail")!, unbroken(`${flag.severity} for ${long}, ${flag.detail}`));
      setText(row.querySelector(".advice")!, unbroken(flag.advice));
    });
  }

  /** Each alarm is said once to a screen reader. */
  #speak(open: readonly Flag[], view: ViewState): void {
    for (const flag of open) {
      if (flag.severity !== "alarm" || this.#spoken.has(flag.id)) continue;
      this.#spoken.add(flag.id);
      setText(this.#speech, `Alarm: ${flagTitle(flag, view.welcome)}. ${flag.advice}`);
    }
  }
}

function calmSentence(view: ViewState): string {
  if (view.welcome === null || view.flags === null || view.runFrameCount === 0)
    return "Nothing is known yet.";
  if (!isLive(view)) return "Nothing was open when the data stopped.";
  const sensors = view.welcome.sensors.length;
  return sensors === 1
    ? "Nothing speaks against the sensor."
    : `Nothing speaks against any of the ${sensors} sensors.`;
}

function markTitle({ text, from }: Mark): string {
  return from === "hub button" ? text : `Mark: ${text}`;
}

/** Brings a list up to date: what, and how long ago. */
function showPast<T>(
  list: HTMLElement,
  values: readonly T[],
  text: (value: T) => readonly [string, string],
): void {
  while (list.children.length > values.length) list.lastElementChild!.remove();
  values.forEach((value, i) => {
    const row = list.children[i] ?? list.appendChild(createPastRow());
    const [what, when] = text(value);
    setText(row.children[0]!, what);
    setText(row.children[1]!, when);
  });
}

function createRow(): HTMLElement {
  const row = document.createElement("li");
  row.innerHTML = `<span class="glyph"></span><p class="title"></p><p class="detail soft"></p><p class="advice"></p>`;
  return row;
}

function createPastRow(): HTMLElement {
  const row = document.createElement("li");
  row.innerHTML = `<span class="what"></span><span class="soft when"></span>`;
  return row;
}
