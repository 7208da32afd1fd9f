/** Runs a rehearsal through the whole pipeline, as fast as it goes, and keeps what came out. */
import { Pipeline, type PipelineObserver } from "../../bridge/pipeline.ts";
import { type RehearsalOptions, RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import type { Flag } from "../../bridge/wire/flag.ts";

export const START_MS = Date.UTC(2026, 5, 1);

export interface Rehearsed {
  readonly pipeline: Pipeline;
  readonly source: RehearsalSource;
  /** Every flag that was raised, as it was in the end. */
  readonly flags: readonly Flag[];
  /** Hub time of the sweep at which each flag was raised, by id: when the operator could have seen it. */
  readonly seenAtS: ReadonlyMap<number, number>;
}

/**
 * @param eachSweep called after each sweep went through all stages
 */
export async function rehearse(
  options: Omit<RehearsalOptions, "rig" | "rate" | "startMs"> & { rig: Rig | string; durationS: number },
  eachSweep: (pipeline: Pipeline, source: RehearsalSource) => void = () => {},
): Promise<Rehearsed> {
  const rig = typeof options.rig === "string" ? loadRig(options.rig) : options.rig;
  const source = new RehearsalSource({ ...options, rig, rate: "max", startMs: START_MS });
  const flags: Flag[] = [];
  const seenAtS = new Map<number, number>();
  const observer: PipelineObserver = {
    sweep: () => eachSweep(pipeline, source),
    flag(flag, change) {
      if (change !== "raised") return;
      flags.push(flag);
      seenAtS.set(flag.id, pipeline.timeS);
    },
  };
  const pipeline: Pipeline = new Pipeline(rig, { startedAt: new Date(START_MS), observer, ring: false });
  await source.run({
    bytes: (chunk, hostTimeMs) => pipeline.bytes(chunk, hostTimeMs),
    linkState: (_state, _detail, hostTimeMs) => pipeline.hostTime(hostTimeMs),
    mark() {},
  });
  return { pipeline, source, flags, seenAtS };
}
