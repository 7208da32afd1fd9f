import { describe, expect, test } from "vitest";
import { reportOf, reportText } from "../../bridge/check/report.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { CHECK_STEPS, type CheckStepName } from "../../bridge/wire/check.ts";
import { rehearsedCheck, rerun, states } from "./rehearsed.ts";

const ALL_PASSED = Object.fromEntries(CHECK_STEPS.map((step) => [step, "passed"]));
const RECORDING = {
  trial: "t",
  startedAt: "2026-06-01T00:00:00.000Z",
  softwareVersion: "0",
  origin: "rehearsal",
  notes: "",
  sha256: "",
  bytes: 0,
  problem: null,
};

test.each(["tethered-animal", "ribbon-foil", "long-dummy"])(
  "a sound rig (%s) passes every step and is go",
  async (rig) => {
    const { run } = await rehearsedCheck({ rig });
    expect(run.check.verdict()).toEqual({ verdict: "go", reasons: [] });
    expect(states(run)).toEqual(ALL_PASSED);
    for (const { figures } of run.check.steps()) expect(figures.length).toBeGreaterThan(0);
    expect(run.check.flags).toEqual([]);
  },
);

describe("a fault is no-go, in its step, on its sensor, for its own reason", () => {
  test.each<[fault: string, step: CheckStepName, sensor: number, reason: RegExp]>([
    ["loose:S3@34+8", "link", 2, /readings received/],
    ["corrupt@40+5", "link", -1, /corrupt packets/],
    ["loss@40+12", "link", -1, /sweeps received/],
    ["silence@40+3", "link", -1, /link silent|sweeps received/],
    ["unreadable:S1@0+200", "link", 0, /readings received 0/],
    ["stuck:S2.gy@5+200", "rest", 1, /stuck axis/],
    ["noisy:S2@0+200", "rest", 1, /gyroscope noise/],
    ["offset:S2@0+200", "rest", 1, /rate at rest/],
    ["heavy:S6@0+200", "rest", 5, /gravity off by/],
    ["strong:S4@0+200", "rest", 3, /field/],
    ["magnet:S4@0+200", "turn-through", 3, /length scatters/],
    ["field@45+60", "turn-through", 0, /length scatters/],
    ["upended:S3@0+200", "bend", 2, /mounting off by 180/],
    ["backward:S2@0+200", "bend", 1, /mounting off by 1[78]/],
    ["swapped:S4@0+200", "bend", 3, /changes places with S5/],
    ["saturation:S6@92+3", "range", 5, /clipped readings/],
    ["flattop:S7@89+12", "range", 6, /clipped readings/],
    ["sag@60+20", "supply", -1, /lowest supply/],
    ["hot@60+20", "supply", -1, /hottest/],
    ["bus@60+20", "supply", -1, /sensor bus/],
    ["restart@50+1.5", "clock", -1, /restarts 1/],
  ])("%s", async (fault, step, sensor, reason) => {
    const { run } = await rehearsedCheck({ faults: [fault] });
    const { verdict, reasons } = run.check.verdict();
    expect(verdict).toBe("no-go");
    expect(run.check.step(step).state).toBe("failed");
    const told = reasons.filter((one) => one.steps.includes(step) && one.sensor === sensor);
    expect(told.map(({ text }) => text).join("\n")).toMatch(reason);
    // What concerns one sensor is said of no other.
    if (sensor >= 0 && fault.includes(":") && !fault.startsWith("swapped")) {
      expect(reasons.filter((one) => one.sensor >= 0 && one.sensor !== sensor)).toEqual([]);
    }
  });
});

test("a sensor taken out on purpose fails nothing and is listed", async () => {
  const { run } = await rehearsedCheck({ faults: ["unreadable:S3@0+200"], without: ["S3"] });
  expect(run.check.verdict().verdict).toBe("go");
  expect(run.check.isOut).toEqual([false, false, true, false, false, false, false]);
  const report = reportOf(run.check, run.pipeline.rig, RECORDING, "0");
  expect(report.sensors.filter(({ takenOut }) => takenOut).map(({ name }) => name)).toEqual(["S3"]);
  expect(report.steps.flatMap(({ figures }) => figures).filter(({ sensor }) => sensor === "S3")).toEqual([]);
  expect(report.operator).toBe("A. Operator");
});

test("a rig all of whose sensors are taken out is never go", async () => {
  const names = loadRig("ribbon-foil").sensors.map(({ name }) => name);
  const { run } = await rehearsedCheck({ rig: "ribbon-foil", without: names, durationS: 110 });
  expect(run.check.verdict().verdict).toBe("incomplete");
});

test("a check that ends early is incomplete, and says what is missing", async () => {
  const { run } = await rehearsedCheck({ durationS: 40 });
  const { verdict, reasons } = run.check.verdict();
  expect(verdict).toBe("incomplete");
  expect(states(run)).toMatchObject({
    link: "passed",
    rest: "passed",
    "turn-through": "not done",
    bend: "not begun",
  });
  const text = reasons.map((reason) => `${reason.steps.join()}: ${reason.text}`).join("\n");
  expect(text).toMatch(/turn-through: \d+ % of the directions seen, 60 % are needed/);
  expect(text).toMatch(/bend,range,supply,clock: not begun/);
});

test("a trial without a check is incomplete, not go", () => {
  const run = rerun([], loadRig("ribbon-foil"), 1000);
  expect(run.check.verdict()).toMatchObject({ verdict: "incomplete" });
});

test("a step that is repeated starts its figures anew: the fault is gone, the attempts are told", async () => {
  let repeated = false;
  const { run } = await rehearsedCheck({
    // The plug is loose at first only.
    faults: ["loose:S3@2+5"],
    onEnded: ({ step, state }, guide) => {
      if (step !== "link" || repeated) return;
      expect(state).toBe("failed");
      repeated = true;
      guide.repeat("link");
    },
  });
  expect(repeated).toBe(true);
  expect(run.check.step("link")).toMatchObject({ state: "passed", attempts: 2 });
  expect(run.check.verdict().verdict).toBe("go");
});

test("a fault after its step has passed still counts where the step watches to the end", async () => {
  const { run } = await rehearsedCheck({ faults: ["loose:S3@90+6"] });
  expect(run.check.step("link").state).toBe("failed");
});

test("the same bytes, however they were cut, give the same report to the byte", async () => {
  const { run, records } = await rehearsedCheck({ faults: ["loose:S3@34+4", "corrupt@50+1"] });
  const { rig } = run.pipeline;
  const report = reportText(reportOf(run.check, rig, RECORDING, "0"));
  for (const size of [1, 7, 1000]) {
    const again = rerun(records, rig, size);
    expect(reportText(reportOf(again.check, rig, RECORDING, "0"))).toBe(report);
  }
});

test("a recording that is not whole is never go", async () => {
  const { run } = await rehearsedCheck();
  const report = reportOf(run.check, run.pipeline.rig, { ...RECORDING, problem: "its tail is cut off" }, "0");
  expect(report.verdict).toBe("incomplete");
  expect(report.reasons).toEqual([{ steps: [], sensor: null, text: "its tail is cut off" }]);
});
