/** A run that is recorded and not watched: bytes and flags go into the trial as they would live. */
import { BendwatchError } from "../errors.ts";
import type { ByteSource } from "../link/source.ts";
import { Pipeline } from "../pipeline.ts";
import type { Rig } from "../rig/load.ts";
import { watchDisk } from "../serve/disk-watch.ts";
import type { TrialRecorder } from "../trial/recorder.ts";

export interface RecordOnlyOptions {
  readonly rig: Rig;
  readonly source: ByteSource;
  readonly recorder: TrialRecorder | null;
  readonly startedAt: Date;
  readonly seconds: number | undefined;
}

/** Runs the source to its end. @returns sweeps recorded. @throws BendwatchError COMMAND_INVALID when nothing would be kept, or it would never end */
export async function recordOnly({
  rig,
  source,
  recorder,
  startedAt,
  seconds,
}: RecordOnlyOptions): Promise<number> {
  if (recorder === null || seconds === undefined) {
    throw new BendwatchError("COMMAND_INVALID", {
      where: "--no-dashboard",
      found: recorder === null ? "no --record" : "no --seconds",
      expected: "both: a run that nobody watches is kept, and ends by itself",
    });
  }
  const pipeline = new Pipeline(rig, {
    startedAt,
    ring: false,
    observer: { flag: (flag) => recorder.flag(flag) },
  });
  const stopDiskWatch = watchDisk({ recorder, thresholds: rig.thresholds, run: () => pipeline });
  await source.run({
    bytes(chunk, hostTimeMs) {
      recorder.bytes(chunk, hostTimeMs);
      pipeline.bytes(chunk, hostTimeMs);
    },
    linkState(state, detail, hostTimeMs) {
      recorder.linkState(state, detail, hostTimeMs);
      pipeline.hostTime(hostTimeMs);
    },
    mark() {},
  });
  stopDiskWatch();
  pipeline.finish();
  await recorder.close("ended");
  return pipeline.sweepCount;
}
