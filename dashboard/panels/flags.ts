/** Flags, newest first, with what to do; what ended lately; marks. */
import type { Flag } from "../../bridge/wire/flag.ts";
import type { ViewState } from "../stream/view-state.ts";
import { duration, setText } from "./words.ts";

const ENDED_SHOWN = 8;
const MARKS_SHOWN = 8;

export class FlagsPanel {
  readonly #open = document.getElementById("open") as HTMLElement;
  readonly #items = new Map<number, HTMLElement>();
  /** Alarms already spoken. */
  readonly #announced = new Set<number>();
  #run = -1;

  draw(view: ViewState): void {
    const { flags, status, run } = view;
    if (run !== this.#run) {
      this.#run = run;
      this.#announced.clear();
    }
    const nowS = status?.hubTimeS ?? 0;
    setText(
      document.getElementById("flag-count") as Element,
      flags.open.length > 0 ? `${flags.open.length} open` : "",
    );
    this.#drawOpen(view, nowS);
    setText(document.getElementById("all-well") as Element, allWell(view));
    drawList("ended", flags.ended.slice(0, ENDED_SHOWN), (flag) => [
      `${flagTitle(view, flag)}: ${flag.detail}`,
      `${duration(nowS - (flag.endS ?? nowS))} ago`,
    ]);
    drawList("marks", view.marks.marks.slice(0, MARKS_SHOWN), (mark) => [
      `Mark: ${mark.text}`,
      `${duration(nowS - mark.timeS)} ago`,
    ]);
    this.#announce(view);
  }

  #drawOpen(view: ViewState, nowS: number): void {
    const { open } = view.flags;
    for (const [id, item] of this.#items) {
      if (open.some((flag) => flag.id === id)) continue;
      item.remove();
      this.#items.delete(id);
    }
    open.forEach((flag, place) => {
      let item = this.#items.get(flag.id);
      if (item === undefined) {
        item = document.createElement("li");
        item.innerHTML = `<i class="glyph" aria-hidden="true"></i><div><strong></strong><small></small><p></p></div>`;
        this.#items.set(flag.id, item);
      }
      if (this.#open.children[place] !== item)
        this.#open.insertBefore(item, this.#open.children[place] ?? null);
      item.dataset.kind = flag.kind;
      item.dataset.severity = flag.severity;
      (item.querySelector(".glyph") as HTMLElement).dataset.severity = flag.severity;
      setText(item.querySelector("strong") as Element, flagTitle(view, flag));
      setText(
        item.querySelector("small") as Element,
        `${flag.severity}, for ${duration(nowS - flag.startS)}, ${flag.detail}`,
      );
      setText(item.querySelector("p") as Element, flag.advice);
    });
  }

  /** Each alarm is said once to a screen reader. */
  #announce(view: ViewState): void {
    for (const flag of view.flags.open) {
      if (flag.severity !== "alarm" || this.#announced.has(flag.id)) continue;
      this.#announced.add(flag.id);
      setText(document.getElementById("alarm") as Element, `Alarm: ${flagTitle(view, flag)}. ${flag.advice}`);
    }
  }
}

/** "S4 magnetic interference"; of the whole rig, the kind alone. */
export function flagTitle({ welcome }: ViewState, flag: Flag): string {
  if (flag.sensor < 0) return flag.kind.charAt(0).toUpperCase() + flag.kind.slice(1);
  return `${welcome?.sensors[flag.sensor]?.name ?? `Sensor ${flag.sensor + 1}`} ${flag.kind}`;
}

/** What there is to say of headings that no magnetometer holds. */
const HEADING_WORDS = {
  magnetic: "",
  relative: "Heading: held by the body.",
  free: "Heading drifts: gyroscopes only.",
} as const;

function allWell({ flags, live, welcome, status }: ViewState): string {
  const heading = HEADING_WORDS[status?.heading ?? welcome?.heading ?? "magnetic"];
  if (flags.open.length > 0) return heading;
  return `${live ? "Nothing speaks against any sensor." : ""} ${heading}`.trim();
}

function drawList<T>(id: string, values: readonly T[], text: (value: T) => readonly [string, string]): void {
  const list = document.getElementById(id) as HTMLElement;
  while (list.children.length > values.length) list.lastElementChild?.remove();
  values.forEach((value, i) => {
    let item = list.children[i];
    if (item === undefined) {
      item = document.createElement("li");
      item.append(document.createElement("span"), document.createElement("span"));
      list.append(item);
    }
    const [what, when] = text(value);
    setText(item.children[0] as Element, what);
    setText(item.children[1] as Element, when);
  });
}
