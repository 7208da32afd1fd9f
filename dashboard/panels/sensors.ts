/**
 * Beneath the ruler, one column per sensor: its name, how much of its ranges is still free, how far the magnetic field is
 * off, and what share of its samples was delivered. Where columns stand close, bars are upright and numbers are shown for
 * sensors in trouble, and for the one that is pointed at or focused.
 */
import type { FlagKind, Severity } from "../../bridge/wire/flag.ts";
import { setGlyph, setSeverity } from "../lanes/glyphs.ts";
import { type Ruler, stationX } from "../lanes/lane.ts";
import { placeNames } from "../lanes/name-places.ts";
import {
  ACCEL_HEADROOM,
  DELIVERED,
  FIELD_OFF,
  GYRO_HEADROOM,
  openSeverity,
  sensorLost,
  sensorNumber,
  trustWord,
} from "../stream/sensors.ts";
import type { ViewState } from "../stream/view-state.ts";
import { percent, setText } from "./text.ts";

interface Row {
  readonly name: string;
  readonly which: number;
  /** Told in fractions of a percent where it is close to whole. */
  readonly fine: boolean;
  /** Share that fills the bar. */
  readonly full: number;
  readonly kinds: readonly FlagKind[];
}

const ROWS: readonly Row[] = [
  {
    name: "Gyro headroom",
    which: GYRO_HEADROOM,
    fine: false,
    full: 1,
    kinds: ["gyro saturation"],
  },
  { name: "Accel headroom", which: ACCEL_HEADROOM, fine: false, full: 1, kinds: ["accel saturation"] },
  {
    name: "Field off by",
    which: FIELD_OFF,
    fine: false,
    full: 0.4,
    kinds: [
      "magnetic interference",
      "magnetic interference at several sensors",
      "rig-wide magnetic interference",
      "alternating field",
      "alternating field at several sensors",
      "rig-wide alternating field",
      "mag saturation",
    ],
  },
  {
    name: "Delivered",
    which: DELIVERED,
    fine: true,
    full: 1,
    kinds: ["lost samples", "sensor read errors", "stuck axis"],
  },
];

/** Least distance between sensors at which a bar and its number fit side by side, pixels. */
const ROOMY = 112;
/** Least distance at which a number fits beside an upright bar. */
const NUMBER_ROOM = 52;
const NAME_GAP = 8;
/** How far a bar and its number reach to the right of the sensor's place. */
const NUMBER_END = 66;

interface Cell {
  readonly host: HTMLElement;
  readonly glyph: HTMLElement;
  readonly fill: HTMLElement;
  readonly number: HTMLElement;
}

interface Column {
  readonly host: HTMLElement;
  readonly name: HTMLElement;
  /** Of the name; -1 where there is no room for it. */
  row: number;
  readonly cells: readonly Cell[];
}

export class SensorColumns {
  readonly #host: HTMLElement;
  #columns: Column[] = [];
  #builtFor: unknown;
  #ruler: Ruler = { left: 0, width: 0 };
  #nameWidths: number[] = [];
  #thinned = false;

  constructor(host: HTMLElement) {
    this.#host = host;
  }

  /** Makes the columns anew when the rig is another. @returns whether it was, and the layout with it */
  build(view: ViewState): boolean {
    const { welcome } = view;
    if (welcome === this.#builtFor) return false;
    this.#builtFor = welcome;
    this.#host.replaceChildren(...ROWS.map(rowName));
    this.#columns = (welcome?.sensors ?? []).map((sensor, i) => {
      const column = createColumn(sensor.name, i);
      this.#host.append(column.host);
      return column;
    });
    return true;
  }

  resize(ruler: Ruler, view: ViewState): void {
    this.#ruler = ruler;
    const sensors = view.welcome?.sensors ?? [];
    if (this.#columns.length !== sensors.length) return;
    const centres = sensors.map((sensor) => stationX(ruler, sensor.station));
    const pitch = leastDistance(centres, ruler);
    const layout = pitch >= ROOMY ? "roomy" : pitch >= NUMBER_ROOM ? "close" : "tight";
    this.#host.dataset.layout = layout;
    const names = this.#columns.map((column) => column.name);
    for (const name of names) name.classList.remove("unshown");
    this.#nameWidths = names.map((name) => name.offsetWidth);
    const { rows, thinned } = placeNames(centres, this.#nameWidths, NAME_GAP);
    this.#thinned = thinned;
    this.#host.style.setProperty("--name-rows", String(thinned ? 2 : Math.max(0, ...rows) + 1));
    this.#columns.forEach((column, i) => {
      column.row = rows[i]!;
      column.host.style.left = `${centres[i]}px`;
      column.host.style.setProperty("--reach", `${Math.min(60, pitch / 2)}px`);
      // Near the tail numbers keep clear of the panel.
      const over = layout === "roomy" ? centres[i]! + NUMBER_END - this.#host.clientWidth : 0;
      column.host.style.setProperty("--shift", `${-Math.max(0, over)}px`);
      this.#placeName(column, column.row);
    });
  }

  #placeName(column: Column, row: number): void {
    column.name.style.setProperty("--name-row", String(Math.max(0, row)));
    column.name.classList.toggle("unshown", row < 0);
  }

  /** Where names are thinned out, those of sensors in trouble stand in the second row. */
  #nameTrouble(view: ViewState): void {
    if (!this.#thinned) return;
    let end = Number.NEGATIVE_INFINITY;
    this.#columns.forEach((column, i) => {
      const x = stationX(this.#ruler, view.welcome!.sensors[i]!.station);
      const half = this.#nameWidths[i]! / 2;
      const wanted = column.row < 0 && openSeverity(view, i) !== null && x - half >= end;
      if (wanted) end = x + half + NAME_GAP;
      this.#placeName(column, wanted ? 1 : column.row);
    });
  }

  /** Brings the numbers up to date; a few times a second. */
  update(view: ViewState): void {
    const sensors = view.welcome?.sensors ?? [];
    if (this.#columns.length !== sensors.length) return;
    this.#nameTrouble(view);
    const known = view.runFrameCount > 0;
    const digits = this.#host.dataset.layout === "roomy" ? 2 : 1;
    const takenUntil = ROWS.map(() => Number.NEGATIVE_INFINITY);
    const spoken = sensors.map(
      ({ name }, i) => `${name}, ${known ? `orientation ${trustWord(view, i)}` : ""}:`,
    );
    ROWS.forEach((row, r) => {
      this.#columns.forEach((column, i) => {
        const value = known ? sensorNumber(view, i, row.which) : Number.NaN;
        const severity = rowSeverity(view, i, row);
        const cell = column.cells[r]!;
        const text = valueText(value, row, known, sensors[i]!.hasMag, digits);
        setText(cell.number, text);
        const share = Number.isNaN(value) ? 0 : Math.min(1, Math.max(0.03, value / row.full));
        cell.fill.style.setProperty("--share", share.toFixed(3));
        setSeverity(cell.host, severity);
        cell.host.classList.toggle("flagged", severity !== null);
        cell.host.classList.toggle("without", Number.isNaN(value));
        setGlyph(cell.glyph, severity);
        // In tight layouts a number is shown where the one before it leaves room.
        const x = stationX(this.#ruler, sensors[i]!.station);
        const shown = severity !== null && x >= takenUntil[r]!;
        if (shown) takenUntil[r] = x + NUMBER_ROOM;
        cell.host.classList.toggle("shown", shown);
        spoken[i] += ` ${row.name} ${text};`;
      });
    });
    this.#columns.forEach((column, i) => {
      column.host.classList.toggle("lost", known && sensorLost(view, i));
      column.host.setAttribute("aria-label", spoken[i]!);
    });
  }
}

/** Headroom may be low on gyro or accel: the row of the lesser one takes that flag. */
function rowSeverity(view: ViewState, sensor: number, row: Row): Severity | null {
  const gyroIsLess = !(
    sensorNumber(view, sensor, ACCEL_HEADROOM) < sensorNumber(view, sensor, GYRO_HEADROOM)
  );
  const takesHeadroom = row.which === (gyroIsLess ? GYRO_HEADROOM : ACCEL_HEADROOM);
  return openSeverity(view, sensor, takesHeadroom ? [...row.kinds, "low headroom"] : row.kinds);
}

function valueText(value: number, row: Row, known: boolean, hasMag: boolean, digits: number): string {
  if (!Number.isNaN(value)) return percent(value, row.fine ? deliveredDigits(value, digits) : 0);
  return known && row.which === FIELD_OFF && !hasMag ? "no mag" : "–";
}

/** Beneath 99 % nobody asks for hundredths; where room is short, a whole is a whole. */
function deliveredDigits(share: number, digits: number): number {
  return share < 0.99 || (share === 1 && digits < 2) ? 0 : digits;
}

function leastDistance(centres: readonly number[], ruler: Ruler): number {
  let least = ruler.width;
  for (let i = 1; i < centres.length; i++) least = Math.min(least, centres[i]! - centres[i - 1]!);
  return least;
}

function rowName(row: Row, index: number): HTMLElement {
  const name = document.createElement("h2");
  name.className = "row-name";
  name.style.setProperty("--row", String(index));
  name.textContent = row.name;
  return name;
}

function createColumn(name: string, sensor: number): Column {
  const host = document.createElement("div");
  host.className = "column";
  host.role = "group";
  host.tabIndex = 0;
  host.dataset.sensor = String(sensor);
  const label = document.createElement("span");
  label.className = "name";
  label.textContent = name;
  host.append(label);
  const cells = ROWS.map((_, index) => {
    const cell = document.createElement("span");
    cell.className = "cell";
    cell.style.setProperty("--row", String(index));
    cell.innerHTML = `<span class="glyph"></span><span class="bar"><span class="fill"></span></span><span class="value"></span>`;
    host.append(cell);
    return {
      host: cell,
      glyph: cell.querySelector<HTMLElement>(".glyph")!,
      fill: cell.querySelector<HTMLElement>(".fill")!,
      number: cell.querySelector<HTMLElement>(".value")!,
    };
  });
  return { host, name: label, row: 0, cells };
}
