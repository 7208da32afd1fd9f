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
import { findGrid, type Grid } from "./grid.ts";
import { mergeTables } from "./merge.ts";
import { checkMapFitsRig, placeFiles, type TableFile } from "./places.ts";
import type { FileSummary, ImportSummary } from "./summary.ts";
import { type ImportWriter, type LineEncoder, SweepLines } from "./sweep-lines.ts";
import { Table } from "./table.ts";

export interface ImportSources {
  readonly files: readonly TableFile[];
  readonly columnMap: ColumnMap;
  readonly rig: Rig;
}

export interface ImportOptions extends ImportSources {
  readonly encodeLine: LineEncoder;
}

/** The rig to store with the imported trial: the given one, its hub sending text lines. */
export function importedRig(rig: Rig): Rig {
  return Object.freeze({ ...rig, hub: Object.freeze({ ...rig.hub, layout: "text" }), packetLayout: null });
}

/**
 * Reads all tables once and writes nothing: call it before a trial is created, so that a wrong table leaves none behind.
 * @returns the tables' grid of times, for importTables
 * @throws BendwatchError TABLE_INVALID naming file, line, column, found and expected
 */
export async function checkTables(options: ImportSources): Promise<Grid> {
  const { columnMap, rig } = options;
  checkMapFitsRig(columnMap, rig);
  const times: number[][] = [];
  for (const table of openTables(options)) {
    const own: number[] = [];
    for await (const row of table.read()) own.push(row.timeUs);
    times.push(own);
  }
  return findGrid(times, 1e6 / rig.hub.rateHz);
}

/**
 * Imports `files` by `columnMap` as the readings of `rig`'s sensors.
 * @param checked what checkTables found; left out, the tables are checked first, before anything is written
 * @throws BendwatchError TABLE_INVALID
 */
export async function importTables(
  options: ImportOptions,
  writer: ImportWriter,
  checked?: Grid,
): Promise<ImportSummary> {
  const { files, columnMap, rig } = options;
  const grid = checked ?? (await checkTables(options));
  const { mergeToleranceMs } = columnMap;
  const toleranceUs = mergeToleranceMs === undefined ? grid.intervalUs / 3 : mergeToleranceMs * 1000;
  const tables = openTables(options);
  const rows = mergeTables(
    tables.map((table) => table.read()),
    toleranceUs,
  );
  const lines = new SweepLines(options, placeFiles(files, columnMap, rig), grid, writer);
  for await (const merged of rows) lines.write(merged);
  return lines.summary(tables.map((table, i) => fileSummary(files[i]!.path, table)));
}

function openTables({ files, columnMap, rig }: ImportSources): Table[] {
  const places = placeFiles(files, columnMap, rig);
  return files.map((file, i) => new Table(file.path, places[i]!, columnMap, rig));
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
