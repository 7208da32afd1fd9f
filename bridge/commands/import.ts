/** bendwatch import: other people's tables become a trial. */
import type { Command } from "commander";
import { encodeTextLine } from "../link/text.ts";
import { columnMapSchema } from "../rig/column-map.ts";
import { loadConfig, loadRig } from "../rig/load.ts";
import type { Sweep } from "../sweep.ts";
import { tableFile } from "../trial/import/places.ts";
import { formatImportSummary } from "../trial/import/summary.ts";
import { IMPORT_EPOCH_MS } from "../trial/import/sweep-lines.ts";
import { checkTables, importedRig, importTables } from "../trial/import/tables.ts";
import { TrialRecorder } from "../trial/recorder.ts";
import { softwareVersion } from "../version.ts";
import { trialFolder } from "./places.ts";

interface ImportCommandOptions {
  columns: string;
  rig: string;
  to: string;
}

export function addImport(program: Command): void {
  program
    .command("import")
    .description("Turn tables of sensor readings into a trial that replays like any other.")
    .argument(
      "<file...>",
      "tables, gzipped or not; SENSOR=FILE says whose table it is, otherwise in the rig's order",
    )
    .requiredOption("--columns <map>", "column map, by name under config/columns or by path")
    .requiredOption("--rig <name>", "rig file, by name under config/rigs or by path")
    .requiredOption("--to <trial>", "name of the new trial, or a path")
    .action(runImport);
}

async function runImport(paths: string[], command: ImportCommandOptions): Promise<void> {
  const rig = loadRig(command.rig);
  const columnMap = loadConfig("columns", command.columns, columnMapSchema);
  const files = paths.map((path) => tableFile(path, rig));
  const sources = { files, columnMap, rig };
  // Before there is a trial: a table that does not hold together leaves no empty one behind.
  const grid = await checkTables(sources);
  const recorder = await TrialRecorder.create({
    folder: trialFolder(command.to),
    rig: importedRig(rig),
    origin: { kind: "import", detail: `${columnMap.name}: ${paths.join(", ")}` },
    softwareVersion,
    startedAt: new Date(IMPORT_EPOCH_MS),
  });
  try {
    const encodeLine = (sweep: Sweep) => encodeTextLine(sweep, rig.models);
    console.log(formatImportSummary(await importTables({ ...sources, encodeLine }, recorder, grid)));
  } finally {
    await recorder.close("imported");
  }
}
