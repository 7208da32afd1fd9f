/** Runs a recorded trial through a pipeline as fast as it goes: the same bytes, at the recorded host times. */
import { join } from "node:path";
import type { Pipeline } from "../pipeline.ts";
import { readJsonLines } from "../trial/json-lines.ts";
import { MARKS_FILE } from "../trial/manifest.ts";
import { type ReadEnd, TrialReader } from "../trial/reader.ts";
import { markLineSchema } from "../trial/trial-source.ts";
import type { CheckAction } from "../wire/check.ts";
import type { Mark } from "../wire/flag.ts";

/**
 * Feeds every record of the trial in `folder` and finishes the run.
 * @param onCheck is told what the operator did in a release check, between the bytes where it was done
 * @returns how the recording ended, and the marks its operator made
 * @throws BendwatchError TRIAL_UNREADABLE
 */
export function runThrough(
  folder: string,
  pipeline: Pipeline,
  onCheck: (action: CheckAction, hostTimeMs: number) => void = () => {},
): { end: ReadEnd | null; marks: readonly Mark[] } {
  const reader = new TrialReader(folder);
  try {
    for (let record = reader.next(); record !== null; record = reader.next()) {
      if (record.kind === "bytes") pipeline.bytes(record.chunk, record.hostTimeMs);
      else if (record.kind === "choice") pipeline.choose(record.choice);
      else {
        pipeline.hostTime(record.hostTimeMs);
        if (record.kind === "check") onCheck(record.check, record.hostTimeMs);
      }
    }
    pipeline.finish();
    // Those of the hub's button come out of the bytes themselves.
    const kept = readJsonLines(join(folder, MARKS_FILE), markLineSchema).values;
    return { end: reader.end, marks: kept.filter(({ from }) => from !== "hub button") };
  } finally {
    reader.close();
  }
}
