/** Same bytes, same answer: however the bytes were cut, and however fast they came. */
import { cpSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { beforeAll, expect, test } from "vitest";
import { exportTrial } from "../../bridge/commands/export.ts";
import { recordOnly } from "../../bridge/commands/record-only.ts";
import { Pipeline } from "../../bridge/pipeline.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { readManifest } from "../../bridge/trial/manifest.ts";
import { TrialReader } from "../../bridge/trial/reader.ts";
import { TrialRecorder } from "../../bridge/trial/recorder.ts";
import { encodeRecord, type TrialRecord } from "../../bridge/trial/records.ts";
import { TrialSource } from "../../bridge/trial/trial-source.ts";
import type { Flag } from "../../bridge/wire/flag.ts";
import type { Choice } from "../../bridge/wire/messages.ts";
import { fingerprints, temporaryFolder } from "../support/folders.ts";
import { START_MS } from "../support/rehearse.ts";

const rig = loadRig("ribbon-foil");
const trial = join(temporaryFolder(), "trial");
const startedAt = new Date(START_MS);
let exported: Record<string, string>;

beforeAll(async () => {
  const faults = ["silence@8+1", "corrupt@12+2", "magnet:S4@15+3", "loose:S2@20+2", "restart@24+1"];
  const source = new RehearsalSource({
    rig,
    rate: "max",
    startMs: START_MS,
    durationS: 30,
    faults,
    syncHz: 50,
  });
  const recorder = await TrialRecorder.create({
    folder: trial,
    rig,
    origin: { kind: "rehearsal", detail: source.label },
    softwareVersion: "0",
    startedAt,
  });
  await recordOnly({ rig, source, recorder, startedAt, seconds: 30 });
  chooseHalfway(trial, { heading: "free" });
  exported = exportOf(trial);
});

test("the export has every table, with rows from the faults too", () => {
  expect(Object.keys(exported)).toEqual([
    "bouts.csv",
    "datapackage.json",
    "drive.csv",
    "envelope.csv",
    "evidence.csv",
    "flags.csv",
    "frames.csv",
    "gait.csv",
    "marks.csv",
    "midline.csv",
    "reference.csv",
    "sensors.csv",
    "summary.json",
    "sync.csv",
  ]);
});

test("what the operator chose while it ran takes effect in the export, and is told by a mark", () => {
  const to = join(temporaryFolder(), "export");
  exportTrial(trial, readManifest(trial), to);
  expect(readFileSync(join(to, "marks.csv"), "utf8")).toContain("Heading free: gyroscopes only");
  expect(readFileSync(join(to, "sensors.csv"), "utf8")).toContain("heading unaided");
});

test.each([1, 7, 64, 1000])(
  "cut into pieces of %i bytes, the same bytes give byte-identical exports",
  (size) => {
    const recut = join(temporaryFolder(), "trial");
    cpSync(trial, recut, { recursive: true });
    const reader = new TrialReader(trial);
    const pieces: Uint8Array[] = [];
    for (let record = reader.next(); record !== null; record = reader.next()) {
      if (record.kind !== "bytes") pieces.push(encodeRecord(record));
      else {
        for (let at = 0; at < record.chunk.length; at += size) {
          pieces.push(encodeRecord({ ...record, chunk: record.chunk.slice(at, at + size) }));
        }
      }
    }
    reader.close();
    writeFileSync(join(recut, "packets.cborseq"), Buffer.concat(pieces));
    expect(exportOf(recut)).toEqual(exported);
  },
);

test("flags recorded live, replayed at 40 times the speed, and exported are the same", async () => {
  const { rig: stored } = readManifest(trial);
  const flags = new Map<number, Flag>();
  const pipeline = new Pipeline(stored, {
    startedAt,
    ring: false,
    observer: { flag: (flag) => flags.set(flag.id, { ...flag }) },
  });
  await new TrialSource(trial, { rate: 40, loop: false }).run({
    bytes: (chunk, hostTimeMs) => pipeline.bytes(chunk, hostTimeMs),
    linkState: (_state, _detail, hostTimeMs) => pipeline.hostTime(hostTimeMs),
    mark() {},
  });
  pipeline.finish();
  const lines = [...flags.values()].map((flag) => JSON.stringify(flag));
  expect(lines.length).toBeGreaterThan(4);
  expect(lastLineOfEachFlag(join(trial, "flags.jsonl"))).toEqual(lines);
});

/** As if the operator had chosen in the middle of the recording. */
function chooseHalfway(folder: string, choice: Choice): void {
  const records: TrialRecord[] = [];
  const reader = new TrialReader(folder);
  for (let record = reader.next(); record !== null; record = reader.next()) records.push(record);
  reader.close();
  const at = records.length >> 1;
  records.splice(at, 0, { kind: "choice", hostTimeMs: records[at]!.hostTimeMs, choice });
  writeFileSync(join(folder, "packets.cborseq"), Buffer.concat(records.map(encodeRecord)));
}

function exportOf(folder: string): Record<string, string> {
  const to = join(temporaryFolder(), "export");
  exportTrial(folder, readManifest(folder), to);
  return fingerprints(to);
}

/** Flags are written again whenever they change; the last line of an id holds. */
function lastLineOfEachFlag(path: string): string[] {
  const last = new Map<number, string>();
  for (const line of readFileSync(path, "utf8").trim().split("\n"))
    last.set((JSON.parse(line) as Flag).id, line);
  return [...last.values()];
}
