#!/usr/bin/env node
/**
 * The command line: parse, dispatch, exit codes. 0 done; 1 a check found something wrong; 2 it could not be done, with an
 * error that says where, what was found, what was expected and what to do. `check` has its own: 0 go, 2 no-go, 3
 * incomplete, 1 when it could not be done.
 */
import { Command, CommanderError } from "commander";
import { addCalibrate } from "./commands/calibrate.ts";
import { addCheck } from "./commands/check.ts";
import { addExport } from "./commands/export.ts";
import { addHistory } from "./commands/history.ts";
import { addImport } from "./commands/import.ts";
import { addLayout } from "./commands/layout.ts";
import { addLive } from "./commands/live.ts";
import { addPorts } from "./commands/ports.ts";
import { addRehearse } from "./commands/rehearse.ts";
import { addReplay } from "./commands/replay.ts";
import { addVerify } from "./commands/verify.ts";
import { BendwatchError } from "./errors.ts";
import { softwareVersion } from "./version.ts";

const program = new Command("bendwatch")
  .description(
    "Watches a chain of inertial sensors along a swimming body while the trial runs: what shape it makes, and whether " +
      "every sensor can be believed.",
  )
  .version(softwareVersion)
  .showHelpAfterError("(bendwatch help <command> lists its options)")
  .exitOverride();

for (const add of [
  addCalibrate,
  addCheck,
  addLive,
  addReplay,
  addRehearse,
  addImport,
  addExport,
  addVerify,
  addHistory,
  addLayout,
  addPorts,
])
  add(program);

const notDone = process.argv[2] === "check" ? 1 : 2;
try {
  await program.parseAsync();
} catch (error) {
  if (error instanceof CommanderError) process.exitCode = error.exitCode === 0 ? 0 : notDone;
  else {
    console.error(error instanceof BendwatchError ? error.message : error);
    process.exitCode = notDone;
  }
}
