/**
 * Every rehearsed fault, alone, through real packets and the whole pipeline: its flag and no other, on the right sensor,
 * in time, and gone after the fault.
 */
import { describe, expect, test } from "vitest";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { FAULT_KINDS } from "../../bridge/rehearsal/faults.ts";
import type { FlagKind } from "../../bridge/wire/flag.ts";
import { rehearse } from "../support/rehearse.ts";
import { healthySwimmer } from "./healthy.ts";

const START_S = 10;
/** Long enough for the slowest condition to end: the magnetic one's second of quiet, the loss window's second. */
const CLEARED_WITHIN_S = 2;
const AFTER_S = 4;

interface Case {
  /** As on the command line, without @start. */
  readonly fault: string;
  readonly forS: number;
  /** Kinds expected, in order of onset, on this sensor (-1: the rig). */
  readonly kinds: readonly FlagKind[];
  readonly sensor: number;
  readonly withinS?: number;
}

const CASES: readonly Case[] = [
  { fault: "saturation:S5", forS: 4, kinds: ["gyro saturation"], sensor: 4 },
  { fault: "flattop:S6", forS: 4, kinds: ["gyro saturation"], sensor: 5 },
  { fault: "magnet:S4", forS: 4, kinds: ["magnetic interference"], sensor: 3, withinS: 1 },
  { fault: "field", forS: 4, kinds: ["rig-wide magnetic interference"], sensor: -1, withinS: 1 },
  { fault: "plate:S3", forS: 4, kinds: ["magnetic interference at several sensors"], sensor: 2, withinS: 1 },
  { fault: "motor:S4", forS: 4, kinds: ["alternating field"], sensor: 3, withinS: 1 },
  { fault: "mains", forS: 4, kinds: ["rig-wide alternating field"], sensor: -1, withinS: 1 },
  { fault: "slipped:S3", forS: 4, kinds: ["mounting changed"], sensor: 2, withinS: 1 },
  { fault: "repeated", forS: 3, kinds: ["duplicate sweeps"], sensor: -1 },
  { fault: "overtaken", forS: 3, kinds: ["late sweeps"], sensor: -1 },
  { fault: "loss", forS: 4, kinds: ["lost samples"], sensor: -1 },
  { fault: "burst", forS: 0.2, kinds: ["lost samples"], sensor: -1 },
  { fault: "loose:S3", forS: 4, kinds: ["lost samples"], sensor: 2 },
  { fault: "corrupt", forS: 3, kinds: ["corrupt packets"], sensor: -1 },
  { fault: "silence", forS: 2, kinds: ["link silent"], sensor: -1 },
  { fault: "stuck:S2.gy", forS: 3, kinds: ["stuck axis"], sensor: 1 },
  { fault: "stuck:S3.ax", forS: 3, kinds: ["stuck axis"], sensor: 2 },
  { fault: "stuck:S6.mz", forS: 3, kinds: ["stuck axis"], sensor: 5 },
  { fault: "unreadable:S1", forS: 3, kinds: ["sensor read errors"], sensor: 0 },
  { fault: "sag", forS: 3, kinds: ["supply low"], sensor: -1 },
  { fault: "hot", forS: 3, kinds: ["hub temperature"], sensor: -1 },
  { fault: "bus", forS: 3, kinds: ["hub fault"], sensor: -1 },
];

/** Told in a body that lies still. */
const AT_REST = [
  { fault: "noisy:S3", kind: "noise at rest", sensor: 2 },
  { fault: "offset:S5", kind: "gyro bias", sensor: 4 },
  { fault: "heavy:S1", kind: "gravity at rest", sensor: 0 },
  { fault: "strong:S6", kind: "field at rest", sensor: 5 },
] as const;

/** Wrong from the start, and told when the body has swum for a while. */
const FROM_THE_START = [
  { fault: "upended:S3", kind: "sensor flipped", sensor: 2 },
  { fault: "backward:S2", kind: "sensor flipped", sensor: 1 },
  { fault: "backward:S6", kind: "sensor flipped", sensor: 5 },
  { fault: "swapped:S4", kind: "sensors swapped", sensor: 3 },
] as const;

/** With tests of their own below. */
const SPECIAL = ["drift", "restart"];

test("every fault that can be rehearsed is held by a test", () => {
  const held = [...CASES, ...AT_REST, ...FROM_THE_START].map(({ fault }) => fault.split(":")[0]!);
  expect([...new Set([...held, ...SPECIAL])].sort()).toEqual(Object.keys(FAULT_KINDS).sort());
});

describe.each([
  // A beat of 2.1 Hz reaches its crest, where a gyroscope flat-tops, four times a second.
  { rig: "ribbon-foil", frequencyHz: 2.1 },
  { rig: "long-dummy", frequencyHz: 2.1 },
])("on $rig", ({ rig, frequencyHz }) => {
  // The sixth of sixteen units lies too far forward to turn fast enough for a flat top.
  const cases = rig === "long-dummy" ? CASES.map((c) => (c.fault === "flattop:S6" ? tailUnit(c) : c)) : CASES;

  test.each(cases)("$fault raises its flag, there and only there, and it clears", async (given) => {
    const { fault, forS, kinds, sensor, withinS = 0.5 } = given;
    const endS = START_S + forS;
    const { flags, seenAtS, pipeline } = await rehearse({
      rig,
      seed: 3,
      durationS: endS + AFTER_S,
      faults: [`${fault}@${START_S}+${forS}`],
      swimmer: { frequencyHz },
    });
    expect(flags.map((flag) => flag.kind)).toEqual(kinds);
    // Two neighbours off alike: the flag is on the worse of them.
    const units = fault.startsWith("plate") ? [sensor, sensor + 1] : [sensor];
    for (const flag of flags) expect(units).toContain(flag.sensor);
    for (const flag of flags) {
      expect(seenAtS.get(flag.id)! - START_S).toBeLessThanOrEqual(withinS);
      expect(flag.startS - START_S).toBeLessThanOrEqual(withinS);
      // At once after a silence, whose end is the first sweep that comes; a sweep's time may be rounded below it.
      expect(flag.endS! - endS).toBeGreaterThan(-0.6);
      expect(flag.endS! - endS).toBeLessThanOrEqual(CLEARED_WITHIN_S);
      expect(flag.advice).not.toBe("");
    }
    expect(pipeline.flags.open).toEqual([]);
  });

  test.each(FROM_THE_START)(
    "$fault, wrong from the start, raises its flag and no other",
    async ({ fault, kind, sensor }) => {
      const durationS = 18;
      const { flags, seenAtS } = await rehearse({
        rig,
        seed: 3,
        durationS,
        faults: [`${fault}@0+${durationS}`],
        swimmer: { frequencyHz: 1.1 },
      });
      expect(flags.map((flag) => [flag.kind, flag.sensor])).toEqual([[kind, sensor]]);
      // Two windows of 4 s after the first, in which the body begins to swim.
      expect(seenAtS.get(flags[0]!.id)!).toBeLessThanOrEqual(12.1);
      expect(flags[0]!.advice).not.toBe("");
    },
  );

  test.each(AT_REST)(
    "$fault, in a body at rest, raises its flag and no other",
    async ({ fault, kind, sensor }) => {
      const faultS = 12;
      const { flags, seenAtS, pipeline } = await rehearse({
        rig,
        seed: 3,
        durationS: START_S + faultS + 8,
        faults: [`${fault}@${START_S}+${faultS}`],
        swimmer: { restS: 60 },
      });
      expect(flags.map((flag) => [flag.kind, flag.sensor])).toEqual([[kind, sensor]]);
      // A window of 3 s that holds the fault alone, the slice it begins in, and for noise the window it begins in.
      expect(seenAtS.get(flags[0]!.id)! - START_S).toBeLessThanOrEqual(6);
      expect(flags[0]!.endS! - START_S - faultS).toBeLessThanOrEqual(6);
      expect(pipeline.flags.open).toEqual([]);
      // The healthy neighbour's figures, from a run of more than half a minute but for the two slices of its ends: the noise
      // of the model (to a tenth: some 300 differences an axis, the noisiest of three) and gravity within 20 mg an axis.
      const { run } = pipeline.health.rest;
      const healthy = 3;
      expect(run.stillS[healthy]).toBeGreaterThan(26);
      expect(Math.abs(run.gyroNoise[healthy]! / (0.006 * RAD_PER_DEG) - 1.05)).toBeLessThan(0.1);
      expect(Math.abs(run.accelNoise[healthy]! / (150e-6 * STANDARD_GRAVITY) - 1.05)).toBeLessThan(0.1);
      expect(Math.abs(run.gravity[healthy]! - 9.81)).toBeLessThan(0.35);
      expect(run.fieldUT[healthy]).toBeCloseTo(50, 0);
    },
  );

  test("a clock that drifts is told when a minute has shown it, and nothing else is", async () => {
    const { flags, seenAtS, pipeline } = await rehearse({
      rig,
      seed: 3,
      durationS: 90,
      faults: ["drift@0+90"],
    });
    expect(flags.map(({ kind, sensor }) => [kind, sensor])).toEqual([["clock drift", -1]]);
    // Twelve blocks of 5 s, and 15 s in which it stays.
    expect(seenAtS.get(flags[0]!.id)!).toBeLessThanOrEqual(80.1);
    // Arrivals come in chunks of 4 ms: over a minute they leave 67 ppm.
    expect(Math.abs(pipeline.drift.ppm! - 600)).toBeLessThan(67);
  });

  test("a hub that restarts is silent first, then said to have restarted", async () => {
    const { flags, pipeline } = await rehearse({
      rig,
      seed: 3,
      durationS: 26,
      faults: [`restart@${START_S}+1.5`],
    });
    expect(flags.map(({ kind, sensor }) => [kind, sensor])).toEqual([
      ["link silent", -1],
      ["hub restarted", -1],
    ]);
    expect(pipeline.flags.open).toEqual([]);
    // Hub time goes on across the restart: the arrival times bridge it.
    expect(pipeline.timeS).toBeGreaterThan(25.9);
    expect(pipeline.timeS).toBeLessThan(26.1);
  });
});

// The short version of healthy-hours.ts.
test.each([
  { rig: "ribbon-foil", seed: 11, durationS: 300 },
  { rig: "long-dummy", seed: 12, durationS: 120 },
])("healthy swimming of all sorts raises no flag: $rig, seed $seed", async ({ rig, seed, durationS }) => {
  const swimmer = healthySwimmer(seed, durationS);
  expect((await rehearse({ rig, seed, durationS, swimmer })).flags).toEqual([]);
});

test.each([1, 2, 3])("ten healthy minutes raise no flag at all (seed %i)", async (seed) => {
  const { flags, pipeline } = await rehearse({ rig: "ribbon-foil", seed, durationS: 600 });
  expect(flags).toEqual([]);
  expect(pipeline.sweepCount).toBe(60_000);
});

function tailUnit(c: Case): Case {
  return { ...c, fault: c.fault.replace("S6", "S16"), sensor: 15 };
}
