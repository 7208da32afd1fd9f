/**
 * Imports tables of sensor readings as a trial: every sweep becomes one line of Bendwatch's text layout, so that what is
 * replayed is exactly what the tables say.
 *
 * The tables are read twice. The first reading checks everything and finds the interval between rows; only then is
 * anything written. Times are rounded to whole µs and kept as they are: a sweep's tick is its row's time (mod 2^32), its
 * host time the same on a fixed epoch, so an import gives the same bytes on any day.
 */
import type { ColumnMap } from "../../rig/column-map.ts";
import type { Rig } from "../../rig/load.ts";
import { findGrid } from "./grid.ts";
import { mergeTables } from "./merge.ts";
import { checkMapFitsRig, placeFiles, type TableFile } from "./places.ts";
import type { FileSummary, ImportSummary } from "./summary.ts";
import { type ImportWriter, type LineEncoder, SweepLines } from "./sweep-lines.ts";
import { Table } from "./table.ts";

export interface ImportOptions {
  readonly files: readonly TableFile[];
  readonly columnMap: ColumnMap;
  readonly rig: Rig;
  readonly encodeLine: LineEncoder;
}

/** The rig to store with the imported trial: the given one, its hub sending text lines. */
export function importedRig(rig: Rig): Rig {
  return Object.freeze({ ...rig, hub: Object.freeze({ ...rig.hub, layout: "text" }) });
}

/**
 * Imports `files` by `columnMap` as the readings of `rig`'s sensors.
 * @throws BendwatchError TABLE_INVALID naming file, line, column, found and expected, before anything is written
 */
export async function importTables(options: ImportOptions, writer: ImportWriter): Promise<ImportSummary> {
  const { files, columnMap, rig } = options;
  checkMapFitsRig(columnMap, rig);
  const places = placeFiles(files, columnMap, rig);
  const open = () => files.map((file, i) => new Table(file.path, places[i]!, columnMap, rig));

  const times: number[][] = [];
  for (const table of open()) {
    const own: number[] = [];
    for await (const row of table.read()) own.push(row.timeUs);
    times.push(own);
  }
  const grid = findGrid(times, 1e6 / rig.hub.rateHz);

  const { mergeToleranceMs } = columnMap;
  const toleranceUs = mergeToleranceMs === undefined ? grid.intervalUs / 3 : mergeToleranceMs * 1000;
  const tables = open();
  const rows = mergeTables(
    tables.map((table) => table.read()),
    toleranceUs,
  );
  const lines = new SweepLines(options, places, grid, writer);
  for await (const merged of rows) lines.write(merged);
  return lines.summary(tables.map((table, i) => fileSummary(files[i]!.path, table)));
}

function fileSummary(path: string, table: Table): FileSummary {
  const { rows, badCells, comments, columns } = table;
  return {
    path,
    rows,
    badCells,
    comments,
    ignored: columns?.ignored ?? [],
    unmentioned: columns?.unmentioned ?? [],
  };
}
