/** A whole release check of a rehearsed body, guided as on the terminal, as fast as it goes; and what was recorded of it. */
import { CheckGuide, rehearsedDeadline } from "../../bridge/commands/check-guide.ts";
import { CheckRun } from "../../bridge/commands/check-run.ts";
import { CHECK_SCRIPT, checkScript } from "../../bridge/rehearsal/check-script.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import type { TrialRecord } from "../../bridge/trial/records.ts";
import type { CheckStepName, CheckStepView } from "../../bridge/wire/check.ts";
import { START_MS } from "../support/rehearse.ts";

export interface Rehearsed {
  readonly run: CheckRun;
  readonly records: readonly TrialRecord[];
}

export interface RehearsedOptions {
  readonly faults?: readonly string[];
  readonly without?: readonly string[];
  readonly rig?: string | Rig;
  /** Called when a step has ended: may repeat it, or stop. */
  readonly onEnded?: (view: CheckStepView, guide: CheckGuide) => void;
  readonly durationS?: number;
}

export async function rehearsedCheck({
  faults = [],
  without = [],
  rig: wanted = "tethered-animal",
  onEnded = () => {},
  durationS = CHECK_SCRIPT.endS + 45,
}: RehearsedOptions = {}): Promise<Rehearsed> {
  const rig = typeof wanted === "string" ? loadRig(wanted) : wanted;
  const run = new CheckRun(rig, new Date(START_MS));
  const records: TrialRecord[] = [];
  const source = new RehearsalSource({
    rig,
    seed: 3,
    faults,
    swimmer: checkScript(),
    rate: "max",
    startMs: START_MS,
    durationS,
  });
  const guide: CheckGuide = new CheckGuide(
    {
      run,
      source,
      deadline: rehearsedDeadline(START_MS),
      asks: false,
      recorder: {
        bytes: (chunk, hostTimeMs) => records.push({ kind: "bytes", hostTimeMs, chunk: chunk.slice() }),
        linkState: (state, detail, hostTimeMs) => records.push({ kind: "link", hostTimeMs, state, detail }),
        check: (check, hostTimeMs) => records.push({ kind: "check", hostTimeMs, check }),
      },
      screen: {
        begun() {},
        progress() {},
        ended: (view) => onEnded(view, guide),
        done() {},
        link() {},
      },
    },
    START_MS,
  );
  guide.prepare("A. Operator", without);
  await guide.lead();
  run.pipeline.finish();
  return { run, records };
}

/** Runs records through a new check, their bytes cut anew. @param size bytes a piece */
export function rerun(records: readonly TrialRecord[], rig: Rig, size: number): CheckRun {
  const run = new CheckRun(rig, new Date(START_MS));
  for (const record of records) {
    if (record.kind === "bytes") {
      for (let at = 0; at < record.chunk.length; at += size) {
        run.pipeline.bytes(record.chunk.subarray(at, at + size), record.hostTimeMs);
      }
      continue;
    }
    run.pipeline.hostTime(record.hostTimeMs);
    if (record.kind === "check") run.act(record.check, record.hostTimeMs);
  }
  run.pipeline.finish();
  return run;
}

/** What each step came to. */
export function states({ check }: CheckRun): Record<CheckStepName, string> {
  return Object.fromEntries(check.steps().map(({ step, state }) => [step, state])) as Record<
    CheckStepName,
    string
  >;
}
