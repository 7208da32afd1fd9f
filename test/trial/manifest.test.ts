import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { type Manifest, readManifest, writeManifest } from "../../bridge/trial/manifest.ts";
import { nextTrialName } from "../../bridge/trial/names.ts";
import { temporaryFolder } from "./fixtures.ts";

const manifest: Manifest = {
  formatVersion: 1,
  softwareVersion: "0.1.0",
  name: "2026-06-01-01",
  startedAt: "2026-06-01T09:30:00.000Z",
  origin: { kind: "rehearsal", detail: "ribbon-foil, no faults" },
  notes: "dry run",
  settings: { rate: 1 },
  rig: loadRig("ribbon-foil"),
};

/** A manifest as JSON, changed by `change`, written and read back. */
function readChanged(
  change: (json: Record<string, unknown> & { rig: Record<string, unknown> }) => void,
): Manifest {
  const json = structuredClone(manifest) as unknown as Parameters<typeof change>[0];
  change(json);
  const folder = temporaryFolder();
  writeFileSync(join(folder, "trial.json"), JSON.stringify(json));
  return readManifest(folder);
}

/** Where the details of the error thrown point to. */
function refusal(action: () => unknown): string {
  try {
    action();
  } catch (error) {
    if (!(error instanceof BendwatchError)) throw error;
    expect(error.code).toBe("TRIAL_UNREADABLE");
    return error.details.map(({ where }) => where).join("\n");
  }
  throw new Error("was not refused");
}

describe("a manifest", () => {
  test("reads as it was written, the whole rig with it", () => {
    const folder = temporaryFolder();
    writeManifest(folder, manifest);
    expect(readManifest(folder)).toEqual(manifest);
  });

  test("is not written over another", () => {
    const folder = temporaryFolder();
    writeManifest(folder, manifest);
    expect(() => writeManifest(folder, manifest)).toThrow(/EEXIST/);
  });

  test("keeps what else was resolved into the rig", () => {
    expect(readChanged((json) => (json.rig.laterAddition = { a: 1 })).rig).toMatchObject({
      laterAddition: { a: 1 },
    });
  });

  test("from software that knew fewer thresholds gets the missing ones from config", () => {
    expect(readChanged((json) => (json.rig.thresholds = {})).rig.thresholds).toEqual(
      loadRig("ribbon-foil").thresholds,
    );
  });

  test("keeps the thresholds it was recorded with", () => {
    const read = readChanged((json) => (json.rig.thresholds = { lowHeadroomShare: 0.25, fromLater: 1 }));
    expect(read.rig.thresholds.lowHeadroomShare).toBe(0.25);
    expect(read.rig.thresholds).not.toHaveProperty("fromLater");
  });

  test.each([
    ["another format", "formatVersion", (json: Record<string, unknown>) => (json.formatVersion = 2)],
    ["an unknown key", "colour", (json: Record<string, unknown>) => (json.colour = "red")],
    ["a start that is no time", "startedAt", (json: Record<string, unknown>) => (json.startedAt = "noon")],
    [
      "a rig without sensors",
      "rig, sensors",
      (json: { rig: Record<string, unknown> }) => (json.rig.sensors = []),
    ],
    ["a model missing", "rig.models", (json: { rig: { models?: unknown } }) => (json.rig.models = [])],
  ])("with %s is refused, naming the place", (_, place, change) => {
    expect(refusal(() => readChanged(change as (json: object) => void))).toContain(place);
  });

  test("that is missing or no JSON is refused", () => {
    const folder = temporaryFolder();
    expect(refusal(() => readManifest(folder))).toContain("trial.json");
    writeFileSync(join(folder, "trial.json"), "{");
    expect(refusal(() => readManifest(folder))).toContain("trial.json");
  });
});

describe("the next trial's name", () => {
  const noon = new Date(2026, 11, 1, 12);

  test("is the day's first where there is none yet", () => {
    expect(nextTrialName(join(temporaryFolder(), "recordings"), noon)).toBe("2026-12-01-01");
  });

  test("is one past the day's highest, whatever else lies there", () => {
    const folder = temporaryFolder();
    for (const name of ["2026-12-01-02", "2026-12-01-06", "2026-11-30-40", "2026-12-01-x", "healthy-demo"]) {
      mkdirSync(join(folder, name));
    }
    expect(nextTrialName(folder, noon)).toBe("2026-12-01-07");
  });

  test("goes on past 99", () => {
    const folder = temporaryFolder();
    mkdirSync(join(folder, "2026-12-01-99"));
    expect(nextTrialName(folder, noon)).toBe("2026-12-01-100");
  });
});
