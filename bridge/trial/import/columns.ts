/** Finds the columns that a column map names in the header of one table, and what turns their cells into SI units. */
import { BendwatchError, type ErrorDetail } from "../../errors.ts";
import {
  COLUMN_UNITS,
  type ColumnMap,
  type ColumnReference,
  type SensorColumnMap,
} from "../../rig/column-map.ts";
import type { Rig } from "../../rig/load.ts";
import { ACCEL, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, MAG } from "../../sweep.ts";

/** Three columns of a sensor: its gyroscope, accelerometer or magnetometer. */
export interface PartColumns {
  /** Where the three values go in the sensor's row of a sweep. */
  readonly offset: number;
  readonly presenceBit: number;
  /** Column numbers counting from 0, in the order of the sensor's axes. */
  readonly columns: readonly number[];
  /** What a cell is multiplied with, per axis: sign, scale and unit. */
  readonly factors: readonly number[];
}

export interface TableColumns {
  /** Names for messages; "" where the table has none. */
  readonly names: readonly string[];
  /** Column number counting from 0; -1 where the rows have a constant rate. */
  readonly time: number;
  /** Parts per sensor of this table. */
  readonly sensors: readonly (readonly PartColumns[])[];
  /** Columns left aside because the map says so, and those it does not mention. */
  readonly ignored: readonly string[];
  readonly unmentioned: readonly string[];
}

/**
 * The names of a table's columns from its header rows: the cells above each other joined by a space, where an empty cell
 * above the last row takes the text to its left (a heading over several columns). Empty columns at the end are dropped.
 */
export function headerNames(rows: readonly (readonly string[])[]): string[] {
  const usedCells = (row: readonly string[]) =>
    row.reduce((used, cell, c) => (cell === "" ? used : c + 1), 0);
  const width = Math.max(0, ...rows.map(usedCells));
  const filled = rows.map((row, r) => {
    let left = "";
    return Array.from({ length: width }, (_, c) => {
      const cell = row[c] ?? "";
      if (r === rows.length - 1) return cell;
      if (cell !== "") left = cell;
      return left;
    });
  });
  return Array.from({ length: width }, (_, c) =>
    filled
      .map((row) => row[c]!)
      .filter((cell) => cell !== "")
      .join(" "),
  );
}

/** "column 3 (gyro x)", as people count. */
export function columnLabel(index: number, names: readonly string[]): string {
  return names[index] ? `column ${index + 1} (${names[index]})` : `column ${index + 1}`;
}

/**
 * Finds every column the map names.
 * @param names the header's names, "" for unnamed columns
 * @param sensors the rig's sensors (counting from 0) that this table holds
 * @throws BendwatchError TABLE_INVALID listing every column that is missing, ambiguous or used twice
 */
export function findColumns(
  file: string,
  names: readonly string[],
  map: ColumnMap,
  rig: Rig,
  sensors: readonly number[],
): TableColumns {
  const finder = new Finder(file, names);
  const time = map.time.column === undefined ? -1 : finder.take(map.time.column, "time");
  const parts = sensors.map((sensor) => {
    const entry = map.sensors.length === 1 ? map.sensors[0]! : map.sensors[sensor]!;
    const name = rig.sensors[sensor]!.name;
    return partsOf(entry).map(({ key, columns, ...part }) => ({
      ...part,
      columns: columns.map((column) => finder.take(placed(column, sensor, name), `${key} of ${name}`)),
    }));
  });
  finder.throwProblems();
  const ignored = new Set(map.ignored.map((column) => finder.indexOf(column)));
  const left = names.flatMap((name, c) => (finder.isTaken(c) || name === "" ? [] : [{ name, c }]));
  return {
    names,
    time,
    sensors: parts,
    ignored: left.filter(({ c }) => ignored.has(c)).map(({ name }) => name),
    unmentioned: left.filter(({ c }) => !ignored.has(c)).map(({ name }) => name),
  };
}

function placed(column: ColumnReference, sensor: number, name: string): ColumnReference {
  return typeof column === "number"
    ? column
    : column.replaceAll("{number}", String(sensor + 1)).replaceAll("{name}", name);
}

function partsOf({ gyro, accel, mag }: SensorColumnMap) {
  const factors = (part: { signs: readonly number[]; scale: number }, unit: number) =>
    part.signs.map((sign) => sign * part.scale * unit);
  const parts = [
    {
      key: "gyro",
      offset: GYRO,
      presenceBit: HAS_GYRO,
      columns: gyro.columns,
      factors: factors(gyro, COLUMN_UNITS.gyro[gyro.unit]),
    },
    {
      key: "accel",
      offset: ACCEL,
      presenceBit: HAS_ACCEL,
      columns: accel.columns,
      factors: factors(accel, COLUMN_UNITS.accel[accel.unit]),
    },
  ];
  if (mag === undefined) return parts;
  const unit = mag.unit === "normalised" ? mag.fieldUT! : COLUMN_UNITS.mag[mag.unit];
  return [
    ...parts,
    { key: "mag", offset: MAG, presenceBit: HAS_MAG, columns: mag.columns, factors: factors(mag, unit) },
  ];
}

/** Looks columns up and remembers what was taken and what went wrong. */
class Finder {
  readonly #file: string;
  readonly #names: readonly string[];
  readonly #taken = new Map<number, string>();
  readonly #problems: ErrorDetail[] = [];

  constructor(file: string, names: readonly string[]) {
    this.#file = file;
    this.#names = names;
  }

  isTaken(index: number): boolean {
    return this.#taken.has(index);
  }

  /** Counting from 0; -1 where the table has no such column. */
  indexOf(column: ColumnReference): number {
    if (typeof column === "string") return this.#names.indexOf(column);
    return column <= this.#names.length ? column - 1 : -1;
  }

  take(column: ColumnReference, purpose: string): number {
    const index = this.indexOf(column);
    const wanted = typeof column === "string" ? `a column named "${column}"` : `a column ${column}`;
    if (index < 0) return this.#problem(purpose, `the columns ${this.#listed()}`, wanted);
    if (typeof column === "string" && this.#names.lastIndexOf(column) !== index) {
      const twice = `columns ${index + 1} and ${this.#names.lastIndexOf(column) + 1} named "${column}"`;
      return this.#problem(purpose, twice, "a name that occurs once, or a column number");
    }
    const other = this.#taken.get(index);
    if (other !== undefined) {
      const label = columnLabel(index, this.#names);
      return this.#problem(purpose, `${label}, which is already the ${other}`, "a column of its own");
    }
    this.#taken.set(index, purpose);
    return index;
  }

  throwProblems(): void {
    if (this.#problems.length > 0) throw new BendwatchError("TABLE_INVALID", this.#problems);
  }

  #problem(purpose: string, found: string, expected: string): -1 {
    this.#problems.push({ where: `${this.#file}, ${purpose}`, found, expected });
    return -1;
  }

  #listed(): string {
    return this.#names.map((name, i) => name || String(i + 1)).join(", ");
  }
}
