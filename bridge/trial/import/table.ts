/**
 * One table file as timed rows in SI units.
 *
 * What is an error and what is a lost reading:
 *   - The time of a row must be there and later than that of the row before, in whole µs: else TABLE_INVALID.
 *   - A row with fewer cells than the table has columns, or with further cells that are not empty: TABLE_INVALID.
 *   - A missing cell (empty, NaN in any case, a marker declared in the map): its part (gyro, accel or mag) is lost in
 *     this row.
 *   - A cell that is no number: likewise lost, and counted as bad. More bad cells in one column than one in a hundred
 *     rows (one is always allowed) mean that the column map does not fit: TABLE_INVALID, naming each such column.
 */
import { BendwatchError } from "../../errors.ts";
import type { ColumnMap } from "../../rig/column-map.ts";
import type { Rig } from "../../rig/load.ts";
import { CHANNELS } from "../../sweep.ts";
import { type CellReader, numberReader, timeReader } from "./cells.ts";
import { columnLabel, findColumns, headerNames, type PartColumns, type TableColumns } from "./columns.ts";
import { readTextRows, type TextRow } from "./table-text.ts";

/** Share of a column's cells that may be no numbers before the table is refused. */
const BAD_CELL_SHARE = 0.01;

/** One row; borrowed: reused for the next. */
export interface TableRow {
  timeUs: number;
  /** This table's sensors x CHANNELS, sensor axes, SI; NaN where missing. */
  readonly values: Float64Array;
  /** Presence bits per sensor of this table; 0 where the reading is held or missing. */
  readonly present: Uint8Array;
  /** 1 where the sensor repeats the row before and the map says that this is no new reading. */
  readonly held: Uint8Array;
}

interface BadCells {
  count: number;
  readonly where: string;
  readonly found: string;
}

export class Table {
  /** Comment lines, once the file was read. */
  comments = 0;
  /** Data rows read so far. */
  rows = 0;
  readonly #file: string;
  readonly #sensors: readonly number[];
  readonly #map: ColumnMap;
  readonly #rig: Rig;
  readonly #number: CellReader;
  readonly #time: CellReader;
  readonly #missing: ReadonlySet<string>;
  readonly #row: TableRow;
  readonly #last: Float64Array;
  readonly #bad = new Map<number, BadCells>();
  #columns: TableColumns | null = null;
  #lastLine = 0;

  /** @param sensors the rig's sensors (counting from 0) that this table holds */
  constructor(file: string, sensors: readonly number[], map: ColumnMap, rig: Rig) {
    this.#file = file;
    this.#sensors = sensors;
    this.#map = map;
    this.#rig = rig;
    this.#number = numberReader(map.format.decimalMark);
    this.#time = timeReader(map.time.unit, map.format.decimalMark);
    this.#missing = new Set(map.format.missing);
    this.#last = new Float64Array(sensors.length * CHANNELS);
    this.#row = {
      timeUs: Number.NEGATIVE_INFINITY,
      values: new Float64Array(sensors.length * CHANNELS),
      present: new Uint8Array(sensors.length),
      held: new Uint8Array(sensors.length),
    };
  }

  /** The columns as found, once the first row was read. */
  get columns(): TableColumns | null {
    return this.#columns;
  }

  /** Cells that are no numbers, so far. */
  get badCells(): number {
    return [...this.#bad.values()].reduce((sum, bad) => sum + bad.count, 0);
  }

  /** Reads the file from start to end, once. @throws BendwatchError TABLE_INVALID */
  async *read(): AsyncGenerator<TableRow> {
    const header: (readonly string[])[] = [];
    for await (const text of readTextRows(this.#file, this.#map.format, this)) {
      if (header.length < this.#map.format.headerRows) {
        header.push(text.cells);
        continue;
      }
      this.#columns ??= this.#findColumns(header, text);
      this.#fill(text, this.#columns);
      yield this.#row;
    }
    if (this.rows === 0) this.#fail(this.#file, "no rows", "a header and at least one row");
    this.#refuseBadColumns();
  }

  #findColumns(header: readonly (readonly string[])[], first: TextRow): TableColumns {
    const names = header.length > 0 ? headerNames(header) : first.cells.map(() => "");
    return findColumns(this.#file, names, this.#map, this.#rig, this.#sensors);
  }

  #fill(text: TextRow, columns: TableColumns): void {
    const { cells, line } = text;
    const width = columns.names.length;
    if (cells.length < width || cells.slice(width).some((cell) => cell !== "")) {
      this.#fail(`${this.#file}, line ${line}`, `${cells.length} cells`, `${width}, one for each column`);
    }
    this.#row.timeUs = this.#timeOf(text, columns);
    this.#lastLine = line;
    columns.sensors.forEach((parts, s) => {
      this.#fillSensor(s, parts, text);
    });
    this.rows++;
  }

  #timeOf({ cells, line }: TextRow, columns: TableColumns): number {
    const { rateHz, unit } = this.#map.time;
    if (rateHz !== undefined) return Math.round((this.rows * 1e6) / rateHz);
    const cell = cells[columns.time]!;
    const timeUs = this.#time(cell);
    const where = `${this.#file}, line ${line}, ${columnLabel(columns.time, columns.names)}`;
    if (Number.isNaN(timeUs)) {
      const expected = unit === "iso" ? "an ISO 8601 date and time" : this.#expectedNumber();
      this.#fail(where, `"${cell}"`, `${expected} as the row's time`);
    }
    if (timeUs <= this.#row.timeUs) {
      const before = `a time later than that of line ${this.#lastLine} by 1 µs or more`;
      this.#fail(where, `"${cell}"`, `${before} (where times are too coarse, give time.rateHz instead)`);
    }
    return timeUs;
  }

  #fillSensor(s: number, parts: readonly PartColumns[], text: TextRow): void {
    const { values, present, held } = this.#row;
    const base = s * CHANNELS;
    let bits = 0;
    let repeats = this.#map.repeated === "held" && this.rows > 0;
    for (const { offset, presenceBit, columns, factors } of parts) {
      let whole = true;
      for (let axis = 0; axis < 3; axis++) {
        const value = this.#valueOf(text, columns[axis]!) * factors[axis]!;
        const at = base + offset + axis;
        repeats &&= Object.is(value, this.#last[at]);
        whole &&= !Number.isNaN(value);
        values[at] = value;
        this.#last[at] = value;
      }
      if (whole) bits |= presenceBit;
    }
    const isHeld = repeats && bits !== 0;
    held[s] = isHeld ? 1 : 0;
    present[s] = isHeld ? 0 : bits;
  }

  #valueOf({ cells, line }: TextRow, column: number): number {
    const cell = cells[column]!;
    const value = this.#number(cell);
    if (this.#missing.has(cell)) return Number.NaN;
    if (Number.isNaN(value) && cell !== "" && cell.toLowerCase() !== "nan")
      this.#countBad(cell, line, column);
    return value;
  }

  #countBad(cell: string, line: number, column: number): void {
    const bad = this.#bad.get(column);
    if (bad !== undefined) {
      bad.count++;
      return;
    }
    const where = `${this.#file}, line ${line}, ${columnLabel(column, this.#columns!.names)}`;
    this.#bad.set(column, { count: 1, where, found: `"${cell}"` });
  }

  #refuseBadColumns(): void {
    const allowed = Math.max(1, this.rows * BAD_CELL_SHARE);
    const refused = [...this.#bad.values()].filter((bad) => bad.count > allowed);
    if (refused.length === 0) return;
    throw new BendwatchError(
      "TABLE_INVALID",
      refused.map(({ where, found, count }) => ({
        where,
        found: `${found}, the first of ${count} such cells in ${this.rows} rows`,
        expected: this.#expectedNumber(),
      })),
    );
  }

  #expectedNumber(): string {
    return `a number with a decimal ${this.#map.format.decimalMark === "," ? "comma" : "point"}`;
  }

  #fail(where: string, found: string, expected: string): never {
    throw new BendwatchError("TABLE_INVALID", { where, found, expected });
  }
}
