import { describe, expect, it } from "vitest";
import { CHANNELS, MAG, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, REST, SPRINT } from "../support/synthetic-sweeps.ts";

/** A field of `ut` that alternates in body axes, as that of a motor on the body does. */
function alternating(sensors: readonly number[], ut: number, hz: number) {
  return (sweep: Sweep) => {
    const now = ut * Math.sin(2 * Math.PI * hz * sweep.timeS + 0.7);
    for (const i of sensors) {
      sweep.raw[i * CHANNELS + MAG]! += 0.6 * now;
      sweep.raw[i * CHANNELS + MAG + 2]! += 0.8 * now;
    }
  };
}

describe.each([
  ["at rest", REST],
  ["cruising", CRUISE],
  ["sprinting", SPRINT],
] as const)("a field that alternates %s", (_, motion) => {
  it("at one sensor is told within a second by frequency, and ends", () => {
    const bench = new HealthBench({ motion }).run(5);
    bench.run(1, alternating([2], 6, 33));
    expect(bench.raised).toEqual(["alternating field@2"]);
    expect(bench.flags[0]!.detail).toMatch(
      /^alternates by [56] µT at 3[23]\.\d Hz as sampled 100 times a second; 67 and 133 Hz would look so, too$/,
    );
    bench.run(2);
    expect(bench.openNow).toEqual([]);
  });

  it("at all of them is the rig's, and mains is named by what sampling makes of it", () => {
    const bench = new HealthBench({ motion }).run(5).run(1, alternating([0, 1, 2, 3, 4, 5], 6, 60));
    expect(bench.raised).toEqual(["rig-wide alternating field@-1"]);
    expect(bench.flags[0]!.detail).toMatch(/at 40\.\d Hz as sampled .*; mains of 60 Hz would look so, too$/);
  });

  it("raises nothing without one", () => {
    expect(new HealthBench({ motion }).run(30).raised).toEqual([]);
  });
});

it("two neighbours are one flag", () => {
  const bench = new HealthBench().run(5).run(1, alternating([3, 4], 6, 21));
  expect(bench.raised).toHaveLength(1);
  expect(bench.raised[0]).toMatch(/^alternating field at several sensors@[34]$/);
});

it("what is slower than a body's own beats is not called alternating", () => {
  const bench = new HealthBench({ motion: REST }).run(5).run(5, alternating([2], 4, 5));
  expect(bench.raised.filter((kind) => kind.includes("alternating"))).toEqual([]);
});
