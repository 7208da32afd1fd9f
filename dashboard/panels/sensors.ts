/** A column for each sensor beneath its mark on the ruler: headroom, field, delivery, trouble. */
import type { FlagKind, Severity } from "../../bridge/wire/flag.ts";
import type { DisplayFrame } from "../../bridge/wire/frame.ts";
import { accelHeadroom, delivered, fieldOff, gyroHeadroom, TRUST_WORDS, trustOf } from "../stream/sensors.ts";
import type { ViewState } from "../stream/view-state.ts";
import { finePercent, percent, setText } from "./words.ts";

interface Row {
  readonly title: string;
  readonly value: (frame: DisplayFrame, sensor: number) => number;
  /** Flags that speak of this row. */
  readonly kinds: readonly FlagKind[];
  /** A bar that is full at this share. */
  readonly full: number;
  readonly say: (share: number) => string;
}

const ROWS: readonly Row[] = [
  { title: "Gyro headroom", value: gyroHeadroom, kinds: ["gyro saturation"], full: 1, say: percent },
  { title: "Accel headroom", value: accelHeadroom, kinds: ["accel saturation"], full: 1, say: percent },
  {
    title: "Field off by",
    value: fieldOff,
    kinds: ["magnetic interference", "rig-wide magnetic interference", "mag saturation"],
    full: 0.5,
    say: percent,
  },
  {
    title: "Delivered",
    value: delivered,
    kinds: ["lost samples", "sensor read errors", "stuck axis", "link silent", "corrupt packets"],
    full: 1,
    say: finePercent,
  },
];

/** Between columns, CSS pixels: what numbers beside the bars need, and what bars alone need. */
const ROOM_FOR_NUMBERS = 108;
const ROOM_FOR_BARS = 34;

/** How far a column with numbers reaches to either side of its sensor's mark, the gutter's and the edge's slack taken off. */
const COLUMN_LEFT = 46;
const COLUMN_RIGHT = 46;

interface Cell {
  readonly element: HTMLElement;
  readonly glyph: HTMLElement;
  readonly bar: HTMLElement;
  readonly number: HTMLElement;
}

export class SensorsPanel {
  readonly #section = document.getElementById("sensors") as HTMLElement;
  #cells: Cell[][] = [];
  #columns: HTMLElement[] = [];

  /** Builds the columns for a rig, or puts them where the ruler now has their sensors. */
  place({ welcome }: ViewState, ruler: { nose: number; tail: number }): void {
    const sensors = welcome?.sensors ?? [];
    if (this.#columns.length !== sensors.length || this.#section.childElementCount === 0)
      this.#build(sensors.length);
    const x = (station: number) => ruler.nose + station * (ruler.tail - ruler.nose);
    let gap = Number.POSITIVE_INFINITY;
    for (let i = 1; i < sensors.length; i++) {
      gap = Math.min(gap, x(sensors[i]?.station ?? 0) - x(sensors[i - 1]?.station ?? 0));
    }
    this.#section.dataset.density =
      gap >= ROOM_FOR_NUMBERS ? "full" : gap >= ROOM_FOR_BARS ? "bars" : "ticks";
    this.#columns.forEach((column, i) => {
      const sensor = sensors[i];
      const at = x(sensor?.station ?? 0);
      column.style.left = `${at}px`;
      // Near the ends a column keeps clear of the row's title and of the panel.
      const clear = Math.max(0, ruler.nose - at + COLUMN_LEFT) - Math.max(0, at + COLUMN_RIGHT - ruler.tail);
      column.style.setProperty("--shift", `${clear}px`);
      column.title = sensor?.name ?? "";
      setText(column.querySelector(".name") as Element, sensor?.name ?? "");
    });
  }

  draw(view: ViewState): void {
    if (!view.hasFrame) return;
    for (let sensor = 0; sensor < this.#columns.length; sensor++) {
      const trust = TRUST_WORDS[trustOf(view.frame, sensor)] ?? "";
      (this.#columns[sensor] as HTMLElement).dataset.trust = trust;
      ROWS.forEach((row, i) => {
        this.#drawCell(view, sensor, row, this.#cells[sensor]?.[i] as Cell);
      });
      this.#describe(view, sensor, trust);
    }
  }

  #build(count: number): void {
    this.#section.replaceChildren();
    for (const { title } of ROWS) {
      const row = document.createElement("div");
      row.className = "row";
      row.innerHTML = "<h2></h2>";
      setText(row.firstElementChild as Element, title);
      this.#section.append(row);
    }
    this.#columns = [];
    this.#cells = [];
    for (let sensor = 0; sensor < count; sensor++) {
      const column = document.createElement("div");
      column.className = "column";
      column.dataset.sensor = String(sensor);
      column.tabIndex = 0;
      column.setAttribute("role", "group");
      column.innerHTML = `<span class="name unseen"></span>`;
      this.#cells.push(ROWS.map(() => addCell(column)));
      this.#columns.push(column);
      this.#section.append(column);
    }
  }

  #drawCell(view: ViewState, sensor: number, row: Row, cell: Cell): void {
    const value = row.value(view.frame, sensor);
    const severity = severityOf(view, sensor, row.kinds);
    if (severity === null) delete cell.element.dataset.severity;
    else cell.element.dataset.severity = severity;
    if (severity === null) delete cell.glyph.dataset.severity;
    else cell.glyph.dataset.severity = severity;
    const missing = Number.isNaN(value);
    cell.bar.style.transform = `scaleX(${missing ? 0 : Math.min(1, Math.max(0.02, value / row.full)).toFixed(2)})`;
    const say = this.#section.dataset.density === "full" ? row.say : percent;
    setText(cell.number, missing ? "–" : say(value));
  }

  #describe({ frame, welcome }: ViewState, sensor: number, trust: string): void {
    const parts = ROWS.map((row) => {
      const value = row.value(frame, sensor);
      return `${row.title} ${Number.isNaN(value) ? "not measured" : row.say(value)}`;
    });
    const label = `${welcome?.sensors[sensor]?.name ?? ""}, orientation ${trust}. ${parts.join(", ")}`;
    const column = this.#columns[sensor] as HTMLElement;
    if (column.ariaLabel !== label) column.ariaLabel = label;
  }
}

function addCell(column: HTMLElement): Cell {
  const element = document.createElement("div");
  element.className = "cell";
  element.innerHTML = `<i class="glyph"></i><span class="bar"><i></i></span><output></output>`;
  column.append(element);
  const [glyph, bar, number] = element.children as unknown as [HTMLElement, HTMLElement, HTMLElement];
  return { element, glyph, bar: bar.firstElementChild as HTMLElement, number };
}

/** Headroom may be low on gyro or accel: the flag's detail says which, the row of the lesser one takes it. */
function severityOf(view: ViewState, sensor: number, kinds: readonly FlagKind[]): Severity | null {
  let found: Severity | null = null;
  for (const flag of view.flags.open) {
    const here = flag.sensor === sensor;
    if (!here) continue;
    if (kinds.includes(flag.kind)) found = worse(found, flag.severity);
    if (flag.kind === "low headroom") {
      const gyroIsLess = gyroHeadroom(view.frame, sensor) <= accelHeadroom(view.frame, sensor);
      if (kinds.includes(gyroIsLess ? "gyro saturation" : "accel saturation"))
        found = worse(found, flag.severity);
    }
  }
  return found;
}

function worse(a: Severity | null, b: Severity): Severity {
  const rank = { notice: 0, caution: 1, alarm: 2 };
  return a !== null && rank[a] >= rank[b] ? a : b;
}
