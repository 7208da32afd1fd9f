/** Small tables, maps and rigs for the import tests. */
import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { type ColumnMap, columnMapSchema } from "../../../bridge/rig/column-map.ts";
import { checkConfig, loadRig, type Rig } from "../../../bridge/rig/load.ts";
import type { Sweep } from "../../../bridge/sweep.ts";
import type { TableFile } from "../../../bridge/trial/import/places.ts";
import type { ImportSummary } from "../../../bridge/trial/import/summary.ts";
import { importTables } from "../../../bridge/trial/import/tables.ts";
import { temporaryFolder } from "../../support/folders.ts";

const folder = temporaryFolder();
let files = 0;

/** Writes a file and returns its path. */
export function tableOf(content: string | Uint8Array, name = `table-${files++}.csv`): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

/** A rig of `count` nine-axis (or six-axis) sensors S1, S2 ... at 100 sweeps a second. */
export function rigOf(count: number, model = "nine-axis-1000"): Rig {
  const sensors = Array.from({ length: count }, (_, i) => ({
    name: `S${i + 1}`,
    station: (i + 1) / (count + 1),
    model,
  }));
  const rig = { name: "Test rig", body: { kind: "foil", lengthMm: 500 }, hub: { rateHz: 100 }, sensors };
  return loadRig(tableOf(JSON.stringify(rig), `rig-${files++}.json`));
}

/** Columns as the table of `header` has them. */
export const NINE_AXIS = {
  gyro: { columns: ["gx", "gy", "gz"], unit: "rad/s" },
  accel: { columns: ["ax", "ay", "az"], unit: "m/s²" },
  mag: { columns: ["mx", "my", "mz"], unit: "µT" },
};
export const SIX_AXIS = { gyro: NINE_AXIS.gyro, accel: NINE_AXIS.accel };
export const HEADER = "t,gx,gy,gz,ax,ay,az,mx,my,mz";

/** A checked column map: one wide nine-axis table with the header above, but for what `overrides` says. */
export function mapOf(overrides: Record<string, unknown> = {}): ColumnMap {
  const map = {
    name: "test map",
    arrangement: "wide",
    time: { column: "t" },
    sensors: [NINE_AXIS],
    ...overrides,
  };
  return checkConfig("test map", map, columnMapSchema);
}

/** A row of the table above: the time, then 1 to 9 times `value`. */
export function row(time: number | string, value = 1, separator = ","): string {
  return [time, ...Array.from({ length: 9 }, (_, i) => value * (i + 1))].join(separator);
}

export interface Imported {
  readonly sequence: number;
  readonly tickUs: number;
  readonly hostTimeMs: number;
  readonly present: number[];
  readonly raw: number[];
}

/** Runs an import and keeps a copy of every sweep it writes. */
export async function imported(
  paths: readonly (string | TableFile)[],
  columnMap: ColumnMap,
  rig: Rig,
): Promise<{ sweeps: Imported[]; summary: ImportSummary }> {
  const sweeps: Imported[] = [];
  const encodeLine = (sweep: Sweep) => {
    const { sequence, tickUs, hostTimeMs, present, raw } = sweep;
    sweeps.push({ sequence, tickUs, hostTimeMs, present: [...present], raw: [...raw] });
    return "";
  };
  const sources = paths.map((path) => (typeof path === "string" ? { path } : path));
  const summary = await importTables({ files: sources, columnMap, rig, encodeLine }, { bytes() {} });
  return { sweeps, summary };
}
