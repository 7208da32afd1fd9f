/** Cells of a table as numbers: decimal point or comma, exponents as found in the wild, times in several units. */
import { COLUMN_UNITS, type ColumnMap } from "../../rig/column-map.ts";

const WITH_POINT = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const WITH_COMMA = /^[+-]?(?:\d+,?\d*|,\d+)(?:[eE][+-]?\d+)?$/;
const ISO = /^(\d{4}-\d\d-\d\d)[T ](\d\d:\d\d:\d\d)(?:[.,](\d{1,9}))?(Z|[+-]\d\d:?\d\d)?$/;

/** Reads one cell; NaN means that it is not what it should be. */
export type CellReader = (cell: string) => number;

/** A reader of numbers such as 12, -0.5, 1.2e-005 or, with a decimal comma, 1,2E-5. Hexadecimal and Infinity are none. */
export function numberReader(decimalMark: "." | ","): CellReader {
  const finite = (value: number) => (Number.isFinite(value) ? value : Number.NaN);
  return decimalMark === "."
    ? (cell) => (WITH_POINT.test(cell) ? finite(Number(cell)) : Number.NaN)
    : (cell) => (WITH_COMMA.test(cell) ? finite(Number(cell.replace(",", "."))) : Number.NaN);
}

/** A reader of times, in whole µs: rounded to the nearest, as finer steps are below any hub's tick. */
export function timeReader(unit: ColumnMap["time"]["unit"], decimalMark: "." | ","): CellReader {
  if (unit === "iso") return isoMicroseconds;
  const read = numberReader(decimalMark);
  return (cell) => Math.round(read(cell) * COLUMN_UNITS.time[unit]);
}

/** ISO 8601 date and time as µs since 1970; digits past the µs are rounded; UTC where no offset is given. */
function isoMicroseconds(cell: string): number {
  const match = ISO.exec(cell);
  if (match === null) return Number.NaN;
  const [, date, time, fraction = "0", offset = "Z"] = match;
  return Date.parse(`${date}T${time}${offset}`) * 1000 + Math.round(Number(`0.${fraction}`) * 1e6);
}
