/** bendwatch verify: is a trial whole? Exit code 1 when it is not. */
import type { Command } from "commander";
import { createDecoder } from "../link/decoder.ts";
import type { Rig } from "../rig/load.ts";
import { describeVerify, verifyTrial } from "../trial/verify.ts";
import { trialFolder } from "./places.ts";

export function addVerify(program: Command): void {
  program
    .command("verify")
    .description("Find any changed, missing or truncated byte of a trial, and say where.")
    .argument("<trial>", "by name under recordings/ or by path")
    .action(async (trial: string) => {
      const report = await verifyTrial(trialFolder(trial), (rig: Rig) => createDecoder(rig, IGNORE_PACKETS));
      console.log(describeVerify(report));
      if (report.problems.length > 0) process.exitCode = 1;
    });
}

const ignore = () => {};
/** Packets are decoded for their checksums alone. */
export const IGNORE_PACKETS = {
  sweep: ignore,
  hello: ignore,
  status: ignore,
  reference: ignore,
  sync: ignore,
  button: ignore,
};
