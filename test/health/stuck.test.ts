import { describe, expect, it } from "vitest";
import { CHANNELS, CONDITION, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, NINE_AXIS, REST, SPRINT } from "../support/synthetic-sweeps.ts";

/** Holds channels of one sensor at the values they have when it is first called. */
function hold(sensor: number, channels: readonly number[]) {
  let values: number[] | null = null;
  return (sweep: Sweep) => {
    values ??= channels.map((c) => sweep.raw[sensor * CHANNELS + c]!);
    channels.forEach((c, k) => {
      sweep.raw[sensor * CHANNELS + c] = values![k]!;
    });
  };
}

const MOTIONS = [
  ["at rest", REST],
  ["cruising", CRUISE],
  ["sprinting", SPRINT],
] as const;

describe.each(MOTIONS)("an axis that repeats one value, %s", (_, motion) => {
  it.each([
    ["gyro x", 0],
    ["gyro z", 2],
    ["accel y", 4],
    ["mag z", 8],
  ])("%s: flagged within half a second on its sensor, and nothing else is", (name, channel) => {
    const bench = new HealthBench({ motion }).run(5);
    const spoil = hold(2, [channel]);
    bench.run(0.5, spoil);
    expect(bench.raised).toEqual(["stuck axis@2"]);
    expect(bench.flags[0]!.detail).toBe(`${name} repeats one value`);
    expect(bench.flags[0]!.startS).toBeCloseTo(5, 2);
    expect(bench.rig.sweep.conditions[2]! & CONDITION.STUCK).toBe(CONDITION.STUCK);
    bench.run(10, spoil).run(1);
    expect(bench.openNow).toEqual([]);
    expect(bench.rig.sweep.conditions[2]! & CONDITION.STUCK).toBe(0);
    expect(bench.raised).toEqual(["stuck axis@2"]);
  });

  it("a sensor that repeats all its values is one flag", () => {
    const bench = new HealthBench({ motion }).run(5);
    bench.run(0.5, hold(3, [0, 1, 2, 3, 4, 5, 6, 7, 8]));
    expect(bench.raised).toEqual(["stuck axis@3"]);
    expect(bench.flags[0]!.detail).toBe("gyro x, y, z; accel x, y, z; mag x, y, z repeats one value");
  });
});

describe("what is not stuck", () => {
  const QUIET = { ...NINE_AXIS, gyro: { ...NINE_AXIS.gyro, noiseDegPerSPerSqrtHz: 0.001 } };

  it("an axis whose noise is below half a count, still at rest", () => {
    const bench = new HealthBench({ model: QUIET, motion: REST }).run(5);
    expect(bench.run(10, hold(0, [0])).raised).toEqual([]);
  });

  it("repeats shorter than the threshold, however often they come", () => {
    const bench = new HealthBench({ motion: REST }).run(5);
    for (let k = 0; k < 30; k++) bench.run(0.28, hold(0, [2])).run(0.05);
    expect(bench.raised).toEqual([]);
  });

  it("a sensor at rest whose hub filters the noise away: its readings change once in ten", () => {
    const count = (2000 * Math.PI) / 180 / 65536;
    let state = 1;
    const level = [0, 0, 0];
    const bench = new HealthBench({ motion: REST });
    bench.run(120, (sweep) => {
      for (let k = 0; k < 3; k++) {
        state = (state * 16_807) % 2_147_483_647;
        if (state / 2_147_483_647 < 0.1) level[k] = level[k] === 0 ? count : 0;
        sweep.raw[k] = level[k]!;
      }
    });
    expect(bench.raised).toEqual([]);
  });

  it("a reading at full scale for long", () => {
    const bench = new HealthBench().run(5);
    bench.run(2, (sweep) => {
      sweep.raw[2] = (1000 * Math.PI) / 180;
    });
    expect(bench.raised).toEqual(["gyro saturation@0"]);
  });
});

it("a coarse axis that moved just before is evidence enough while the others move", () => {
  const coarse = { ...NINE_AXIS, gyro: { ...NINE_AXIS.gyro, rangeDegPerS: 2000 } };
  const bench = new HealthBench({ model: coarse, motion: CRUISE }).run(5);
  expect(bench.run(0.5, hold(1, [2])).raised).toEqual(["stuck axis@1"]);
});
