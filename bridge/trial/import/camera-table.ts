/**
 * A camera's midlines as a CSV table; recordings/README.md describes it. Its columns:
 *
 *     time_s | frame                     hub time, or the count of the frame's pulse (the hub's `edge`)
 *     x_mm_000,y_mm_000,x_mm_001,...     points evenly spaced from nose to tail tip, at least four
 *     x_mm_at_0,y_mm_at_0,x_mm_at_12.5,... or points at stations, percent of the body's length from the nose
 *
 * A row with an empty cell is a frame without midline: left out and counted.
 */
import { BendwatchError } from "../../errors.ts";
import type { ColumnMap } from "../../rig/column-map.ts";
import { numberReader } from "./cells.ts";
import { readTextRows, type TextRow } from "./table-text.ts";

const LEAST_POINTS = 4;
const FORMAT: ColumnMap["format"] = {
  separator: ",",
  decimalMark: ".",
  preambleLines: 0,
  headerRows: 1,
  missing: [],
  encoding: "utf-8",
};
const STATION = /^x_mm_at_(\d+(?:\.\d+)?)$/;

export interface CameraTable {
  readonly clock: "time_s" | "frame";
  /** Hub time, s, or the pulse's count, of each frame; increasing. */
  readonly when: Float64Array;
  /** Line of each frame in the file. */
  readonly lines: readonly number[];
  /** Place of each point, 0 nose to 1 tail tip, increasing. */
  readonly stations: readonly number[];
  /** x and y of each point, frame after frame, mm. */
  readonly points: Float64Array;
  /** Frames without midline. */
  readonly leftOut: number;
}

/** @throws BendwatchError TABLE_INVALID naming file, row and column */
export async function readCameraTable(file: string): Promise<CameraTable> {
  const read = numberReader(".");
  const when: number[] = [];
  const lines: number[] = [];
  const points: number[] = [];
  let header: { clock: CameraTable["clock"]; stations: number[]; names: readonly string[] } | null = null;
  let leftOut = 0;
  for await (const row of readTextRows(file, FORMAT, { comments: 0 })) {
    if (header === null) {
      header = checkHeader(file, row.cells);
      continue;
    }
    const { names, clock } = header;
    if (row.cells.length !== names.length) {
      throw wrong(`${file}, line ${row.line}`, `${row.cells.length} cells`, `${names.length}, one a column`);
    }
    const values = row.cells.map((cell, i) => cellOf(file, row, names[i], cell, read));
    const time = values[0];
    checkOrder(file, row, clock, time, when.at(-1));
    if (values.includes(Number.NaN)) leftOut++;
    else {
      when.push(time);
      lines.push(row.line);
      points.push(...values.slice(1));
    }
  }
  if (header === null) throw wrong(file, "an empty file", "a header row and a row a frame");
  if (when.length < LEAST_POINTS) {
    const found = `${when.length} frames with a whole midline, ${leftOut} without`;
    throw wrong(file, found, `at least ${LEAST_POINTS} frames`);
  }
  const { clock, stations } = header;
  return {
    clock,
    when: Float64Array.from(when),
    lines,
    stations,
    points: Float64Array.from(points),
    leftOut,
  };
}

/** Checks the columns' names, each against the one that belongs in its place. */
function checkHeader(file: string, names: readonly string[]) {
  const column = (i: number) => `${file}, header, column ${i + 1}`;
  const clock = names[0];
  if (clock !== "time_s" && clock !== "frame")
    throw wrong(column(0), `"${clock}"`, '"time_s" (hub time) or "frame" (the count of its pulse)');
  const atStations = STATION.test(names[1] ?? "");
  const stations: number[] = [];
  for (let i = 1; i < names.length; i += 2) {
    const percent = Number(STATION.exec(names[i])?.[1] ?? Number.NaN);
    const evenly = `x_mm_${String(stations.length).padStart(3, "0")}`;
    const last = stations.at(-1) ?? -1;
    if (atStations ? !(percent > last && percent <= 100) : names[i] !== evenly)
      throw wrong(
        column(i),
        `"${names[i]}"`,
        atStations ? `x_mm_at_ and more than ${last}, up to 100` : evenly,
      );
    const beside = names[i].replace("x", "y");
    if (names[i + 1] !== beside) throw wrong(column(i + 1), `"${names[i + 1] ?? ""}"`, beside);
    stations.push(atStations ? percent : stations.length);
  }
  if (stations.length < LEAST_POINTS) {
    throw wrong(
      `${file}, header`,
      `${stations.length} points`,
      `at least ${LEAST_POINTS}, each with x and y`,
    );
  }
  const whole = atStations ? 100 : stations.length - 1;
  return { clock, names, stations: stations.map((station) => station / whole) } as const;
}

function cellOf(
  file: string,
  { line }: TextRow,
  name: string,
  cell: string,
  read: (cell: string) => number,
): number {
  if (cell === "" || /^nan$/i.test(cell)) return Number.NaN;
  const value = read(cell);
  if (Number.isNaN(value)) {
    throw wrong(
      `${file}, line ${line}, column ${name}`,
      `"${cell}"`,
      "a number, or nothing where it was not seen",
    );
  }
  return value;
}

function checkOrder(
  file: string,
  { line }: TextRow,
  clock: CameraTable["clock"],
  time: number,
  before = Number.NEGATIVE_INFINITY,
): void {
  const where = `${file}, line ${line}, column ${clock}`;
  if (Number.isNaN(time)) throw wrong(where, "nothing", "when the frame was taken");
  if (clock === "frame" && !Number.isInteger(time)) throw wrong(where, String(time), "a whole number");
  if (time <= before) throw wrong(where, String(time), `more than ${before}, that of the frame before`);
}

function wrong(where: string, found: string, expected: string): BendwatchError {
  return new BendwatchError("TABLE_INVALID", { where, found, expected });
}
