/** bendwatch check, as a user runs it: on a rehearsed body, and judged anew from what was recorded. */
import { spawn } from "node:child_process";
import { cpSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { expect, onTestFinished, test } from "vitest";
import { packageRoot } from "../../bridge/paths.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { bendwatch } from "../support/bridge-process.ts";
import { fingerprints, temporaryFolder } from "../support/folders.ts";
import { openPty } from "../support/pty.ts";

async function rehearsed(...args: string[]) {
  const trial = join(temporaryFolder(), "trial");
  const all = ["--rig", "ribbon-foil", "--rehearse", "--rate", "max", "--record", trial, ...args];
  return { trial, ...(await bendwatch("check", ...all)) };
}

test("a sound rig is go, exit code 0; the recording alone gives the same report, to the byte", async () => {
  const { trial, code, out } = await rehearsed("--operator", "A. Operator", "--without", "S2");
  expect(out).toMatch(/1 of 7 {2}link[\s\S]*7 of 7 {2}clock[\s\S]*GO: every step passed\./);
  expect(out).toContain("Taken out on purpose: S2.");
  expect(code).toBe(0);
  const report = JSON.parse(readFileSync(join(trial, "report.json"), "utf8"));
  expect(report).toMatchObject({
    verdict: "go",
    operator: "A. Operator",
    recording: { trial: "trial", problem: null },
  });
  expect(report.recording.sha256).toBe(fingerprints(trial)["packets.cborseq"]);
  expect(readFileSync(join(trial, "report.html"), "utf8")).toContain(report.recording.sha256);

  const to = join(temporaryFolder(), "again");
  const again = await bendwatch("check", trial, "--to", to);
  expect(again.code).toBe(0);
  expect(again.out).toContain("The stored report agrees, to the byte.");
  for (const file of ["report.json", "report.html"]) {
    expect(fingerprints(to)[file]).toBe(fingerprints(trial)[file]);
  }
  expect(await bendwatch("verify", trial)).toMatchObject({ code: 0 });
});

test("a fault is no-go, exit code 2, with its reason; a stored report that says otherwise is told and kept", async () => {
  const { trial, code, out } = await rehearsed("--fault", "stuck:S4.az@0+200");
  expect(code).toBe(2);
  expect(out).toMatch(/NO-GO\n {2}rest.*, S4: stuck axis: accel z repeats one value/);

  const forged = join(temporaryFolder(), "forged");
  cpSync(trial, forged, { recursive: true });
  const path = join(forged, "report.json");
  writeFileSync(path, readFileSync(path, "utf8").replace('"no-go"', '"go"'));
  const before = fingerprints(forged);
  const again = await bendwatch("check", forged);
  expect(again.code).toBe(2);
  expect(again.out).toMatch(/DIFFERS from what the recording says: it says go/);
  expect(fingerprints(forged)).toEqual(before);
});

test("a trial in which nothing was checked is incomplete, exit code 3", async () => {
  const to = join(temporaryFolder(), "report");
  const { code, out } = await bendwatch("check", "recordings/healthy-demo", "--to", to);
  expect(code).toBe(3);
  expect(out).toMatch(/INCOMPLETE[\s\S]*not begun/);
});

test("live, from a serial port: interrupted, it is incomplete, exit code 3, and all that came is kept", async () => {
  const pty = await openPty();
  onTestFinished(() => pty.close());
  const source = new RehearsalSource({ rig: loadRig("ribbon-foil"), swimmer: { restS: 1e6 } });
  onTestFinished(() => source.stop());
  let writing: Promise<void> = Promise.resolve();
  const trial = join(temporaryFolder(), "trial");
  const program = join(packageRoot, "dist", "bendwatch.js");
  const args = [program, "check", "--rig", "ribbon-foil", "--port", pty.path, "--record", trial];
  const child = spawn(process.execPath, args, { stdio: ["ignore", "pipe", "inherit"] });
  const ended = new Promise<number | null>((resolve) => child.on("close", resolve));
  let out = "";
  child.stdout.on("data", (data: Buffer) => {
    const before = out;
    out += data.toString();
    // The second step is begun: the first has passed.
    if (out.includes("2 of 7") && !before.includes("2 of 7")) child.kill("SIGINT");
  });
  void source.run({
    bytes(chunk) {
      const sent = chunk.slice();
      writing = writing.then(() => pty.write(sent)).catch(() => {});
    },
    linkState() {},
    mark() {},
  });
  expect(await ended).toBe(3);
  expect(out).toMatch(/1 of 7 {2}link[\s\S]*passed[\s\S]*INCOMPLETE[\s\S]*rest, S1: still for/);
  expect(await bendwatch("verify", trial)).toMatchObject({ code: 0 });
});

test.each([
  { args: [], says: "neither a trial nor --rig" },
  { args: ["healthy-demo", "--rig", "ribbon-foil"], says: "both a trial and --rig" },
  { args: ["--rig", "ribbon-foil", "--rehearse", "--without", "S9"], says: '"S9"' },
  { args: ["no-such-trial"], says: "TRIAL_UNREADABLE" },
  { args: ["--unknown"], says: "unknown option" },
])("what could not be done ends with code 1, never with a verdict's: $says", async ({ args, says }) => {
  const { code, err } = await bendwatch("check", ...args);
  expect(err).toContain(says);
  expect(code).toBe(1);
});
