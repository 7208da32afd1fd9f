import { describe, expect, it } from "vitest";
import { CHANNELS, CONDITION, MAG, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, REST, SPRINT } from "../support/synthetic-sweeps.ts";

/** Adds a field in body axes, as a magnet fixed to the body would, µT. */
function magnet(sensors: readonly number[], [x, y, z]: readonly [number, number, number]) {
  return (sweep: Sweep) => {
    for (const i of sensors) {
      const at = i * CHANNELS + MAG;
      sweep.raw[at]! += x;
      sweep.raw[at + 1]! += y;
      sweep.raw[at + 2]! += z;
    }
  };
}

const ALL = [0, 1, 2, 3, 4, 5];

describe.each([
  ["at rest", REST],
  ["cruising", CRUISE],
  ["sprinting", SPRINT],
] as const)("interference %s", (_, motion) => {
  it.each([
    ["stronger field", [0, 0, -12]],
    ["weaker field", [0, 0, 12]],
    ["sideways field", [0, 15, 0]],
  ] as const)("%s at one sensor: flagged there within a second, marked, ended, nothing else", (_, field) => {
    const bench = new HealthBench({ motion }).run(5);
    const spoil = magnet([3], field);
    bench.run(1, spoil);
    expect(bench.raised).toEqual(["magnetic interference@3"]);
    expect(bench.flags[0]!.detail).toMatch(/^field up to \d+ % off: norm [+−]\d+ %, dip [+−]\d+°$/);
    bench.run(5, spoil);
    expect(bench.rig.sweep.conditions[3]! & CONDITION.MAG_DISTURBED).toBe(CONDITION.MAG_DISTURBED);
    expect(bench.rig.sweep.conditions[2]! & CONDITION.MAG_DISTURBED).toBe(0);
    bench.run(1.5);
    expect(bench.openNow).toEqual([]);
    expect(bench.rig.sweep.conditions[3]! & CONDITION.MAG_DISTURBED).toBe(0);
    expect(bench.raised).toHaveLength(1);
  });

  it("along the whole rig: one flag for the rig within a second, ended, and none for a sensor", () => {
    const bench = new HealthBench({ motion }).run(5);
    const spoil = magnet(ALL, [4, 4, -14]);
    bench.run(1, spoil);
    expect(bench.raised).toEqual(["rig-wide magnetic interference@-1"]);
    bench.run(5, spoil).run(1.5);
    expect(bench.openNow).toEqual([]);
    expect(bench.raised).toHaveLength(1);
  });
});

describe("one sensor or the rig", () => {
  const field = [0, 0, -15] as const;

  it("two neighbours of six are one trouble of theirs, two apart are two, three of six are the rig's", () => {
    const near = new HealthBench().run(5).run(2, magnet([1, 2], field));
    expect(near.raised).toHaveLength(1);
    expect(near.raised[0]).toMatch(/^magnetic interference at several sensors@[12]$/);
    expect(near.flags[0]!.detail).toMatch(/^at S2 to S3; worst here: field up to/);
    near.run(2);
    expect(near.openNow).toEqual([]);
    const apart = new HealthBench().run(5).run(2, magnet([1, 4], field));
    expect(apart.raised.sort()).toEqual(["magnetic interference@1", "magnetic interference@4"]);
    expect(new HealthBench().run(5).run(2, magnet([1, 2, 3], field)).raised).toEqual([
      "rig-wide magnetic interference@-1",
    ]);
  });

  it("a magnet that passes along the body is each sensor's in turn", () => {
    const bench = new HealthBench().run(5);
    for (const i of ALL) bench.run(1.5, magnet([i], field));
    expect(bench.raised).toEqual(ALL.map((i) => `magnetic interference@${i}`));
  });

  it("a sensor still disturbed when the rig's disturbance ends gets its own flag", () => {
    const bench = new HealthBench().run(5).run(3, magnet(ALL, field));
    bench.run(2, magnet([4], field));
    expect(bench.raised).toEqual(["rig-wide magnetic interference@-1", "magnetic interference@4"]);
    expect(bench.openNow).toEqual(["magnetic interference@4"]);
  });
});

describe("what is not told", () => {
  it("a field off by less than the threshold, shown all the same", () => {
    // 2.5 µT of 50: 5 %, with thresholds of 10 % and, at rest, 6 %.
    const bench = new HealthBench({ motion: REST }).run(5).run(20, magnet([2], [0, 0, -2.5]));
    expect(bench.raised).toEqual([]);
    // Within smoothed noise of 0.4 µT.
    expect(bench.health.fieldOff[2]).toBeCloseTo(0.05, 2);
  });

  it("a touch of a few readings", () => {
    const bench = new HealthBench().run(5);
    for (let k = 0; k < 10; k++) bench.run(0.1, magnet([2], [0, 0, -10])).run(1.5);
    expect(bench.raised).toEqual([]);
  });
});

describe("the reference", () => {
  it("is the building's steady field where that differs from the site's, with a notice that goes by itself", () => {
    const bench = new HealthBench({ fieldUT: 42, dipDeg: 58 }).run(6);
    expect(bench.flags).toHaveLength(1);
    expect(bench.flags[0]).toMatchObject({
      kind: "rig-wide magnetic interference",
      sensor: -1,
      severity: "notice",
    });
    expect(bench.flags[0]!.detail).toBe("field here 42.0 µT, dip 58°: 24 % off the Earth's at this site");
    bench.run(10);
    expect(bench.openNow).toEqual([]);
    bench.run(1, magnet([1], [0, 0, -12]));
    expect(bench.raised.slice(1)).toEqual(["magnetic interference@1"]);
  });

  it("a disturbance of the rig during that notice is a flag of its own", () => {
    const bench = new HealthBench({ fieldUT: 42, dipDeg: 58 }).run(4).run(1, magnet(ALL, [0, 0, -15]));
    expect(bench.flags.map((flag) => flag.severity)).toEqual(["notice", "alarm"]);
    expect(bench.flags[0]!.endS).not.toBeNull();
  });

  it("is learned without a site as well", () => {
    const bench = new HealthBench({ expectedField: null, fieldUT: 42 }).run(5);
    expect(bench.raised).toEqual([]);
    bench.run(1, magnet([5], [0, 0, -12]));
    expect(bench.raised).toEqual(["magnetic interference@5"]);
  });

  it("is that of the others for a sensor disturbed from the start", () => {
    const bench = new HealthBench().run(4, magnet([0], [0, 0, -20]));
    expect(bench.raised).toEqual(["magnetic interference@0"]);
  });

  it("is the site's when the field along the rig is not steady", () => {
    // Sensors disagree by tens of µT from each other.
    const uneven = (sweep: Sweep) => {
      for (const i of ALL) magnet([i], [0, 0, 25 * i - 60])(sweep);
    };
    const bench = new HealthBench().run(9, uneven);
    expect(bench.raised).toEqual([]);
    expect(bench.run(5, uneven).raised).toEqual(["rig-wide magnetic interference@-1"]);
    const siteless = new HealthBench({ expectedField: null }).run(14, uneven);
    expect(siteless.raised).toEqual([]);
    expect(siteless.health.fieldOff[0]).toBeNaN();
  });
});

describe("a vertical that cannot be believed", () => {
  it("keeps a clipped gyroscope's tilt error from being called interference", () => {
    const bench = new HealthBench({ motion: REST }).run(5);
    const exact = new Float64Array(6);
    const tilt = Math.sin(8 * (Math.PI / 180));
    const run = (seconds: number, clipped: boolean) => {
      for (let k = 0; k < seconds * 100; k++) {
        const sweep = bench.rig.next((s) => {
          if (clipped) s.raw[0] = 1000 * (Math.PI / 180);
        });
        bench.rig.orientations.set([Math.sqrt(1 - tilt * tilt), tilt, 0, 0], 0);
        bench.health.observe(sweep, bench.rig.orientations, exact);
      }
    };
    run(0.1, true);
    run(10, false);
    expect(bench.raised).toEqual(["gyro saturation@0"]);
    // The same tilt with nothing to excuse it is told.
    run(4, false);
    expect(bench.raised).toEqual(["gyro saturation@0", "magnetic interference@0"]);
  });
});
