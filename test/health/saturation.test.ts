import { describe, expect, it } from "vitest";
import { CHANNELS, CONDITION, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, NINE_AXIS, REST, SPRINT } from "../support/synthetic-sweeps.ts";

const DEG = Math.PI / 180;
const Y = 1;
const Z = 2;

/** Cuts one channel of one sensor at plus and minus `level`, as a limiter in front of the counter would. */
function cut(sensor: number, channel: number, level: number) {
  return (sweep: Sweep) => {
    const at = sensor * CHANNELS + channel;
    sweep.raw[at] = Math.max(-level, Math.min(level, sweep.raw[at]!));
  };
}

/** A model whose range is that of the fault: the sensor clips by itself. */
const SMALL_GYRO = { ...NINE_AXIS, gyro: { ...NINE_AXIS.gyro, rangeDegPerS: 500 } };

describe("at full scale", () => {
  it("flags a clipped gyroscope at its first clipped reading, on every sensor that clips, and nothing else", () => {
    const bench = new HealthBench({ model: SMALL_GYRO, motion: SPRINT }).run(5);
    expect(new Set(bench.raised)).toEqual(new Set([0, 1, 2, 3, 4, 5].map((i) => `gyro saturation@${i}`)));
    // Each sensor's yaw rate passes 500 °/s within the first beat, 0.2 s.
    for (const flag of bench.flags) expect(flag.startS).toBeLessThan(0.2);
    // Above 500 of 785 °/s for 56 % of the time.
    expect(bench.flags[0]!.detail).toMatch(/^at full scale on z, up to 5\d % of a second$/);
    expect(bench.flags[0]!.severity).toBe("alarm");
  });

  it("sets the condition bit on exactly the clipped readings", () => {
    const bench = new HealthBench({ model: SMALL_GYRO, motion: SPRINT });
    const limit = 0.999 * 500 * DEG;
    let clipped = 0;
    for (let k = 0; k < 200; k++) {
      bench.run(0.01);
      const { raw, conditions } = bench.rig.sweep;
      const full = Math.abs(raw[Z]!) >= limit;
      expect((conditions[0]! & CONDITION.GYRO_CLIPPED) !== 0).toBe(full);
      if (full) clipped++;
    }
    // An amplitude of 785 °/s is above 500 °/s for more than half of the time.
    expect(clipped).toBeGreaterThan(90);
  });

  it.each([
    ["accel", 3 + Y, 8 * 9.80665, "accel saturation@2"],
    ["mag", 6 + Y, 1200, "mag saturation@2"],
  ])("flags a clipped %s on its sensor alone", (_, channel, range, flag) => {
    const bench = new HealthBench().run(5);
    bench.run(2, (sweep) => {
      if (Math.floor(sweep.timeS * 10) % 5 === 0) sweep.raw[2 * CHANNELS + channel] = -range;
    });
    expect(bench.raised).toEqual([flag]);
  });

  it("counts a reading exactly at the threshold as clipped, and one just below as not", () => {
    const range = 1000 * DEG;
    const at = (value: number) =>
      new HealthBench({ motion: REST }).run(1, (sweep) => {
        if (sweep.timeS === 0.5) sweep.raw[Z] = value;
      });
    expect(at(range * 0.999).raised).toContain("gyro saturation@0");
    expect(at(range * 0.9989).raised).toEqual(["low headroom@0"]);
  });

  it("ends one second after the last clipped reading, and dates the end to that reading", () => {
    const bench = new HealthBench().run(2);
    const spoil = (sweep: Sweep) => {
      if (sweep.timeS <= 3) sweep.raw[Z] = 1000 * DEG;
    };
    bench.run(1.99, spoil);
    expect(bench.openNow).toEqual(["gyro saturation@0"]);
    bench.run(0.02);
    expect(bench.openNow).not.toContain("gyro saturation@0");
    expect(bench.flags[0]!.endS).toBeCloseTo(3, 6);
  });

  it("is one flag over a run of clipped beats", () => {
    const bench = new HealthBench().run(2);
    // A reading every 0.8 s, closer than the second that ends a flag.
    bench.run(8, (sweep) => {
      if (Math.round(sweep.timeS * 100) % 80 === 0) sweep.raw[Z] = 1000 * DEG;
    });
    expect(bench.raised).toEqual(["gyro saturation@0"]);
  });
});

describe("flat-topped below full scale", () => {
  // Cruise peaks at 181 °/s, sprint at 785 °/s.
  it.each([
    ["cruise, cut at two thirds", CRUISE, 120],
    ["cruise, cut at a third", CRUISE, 60],
    ["sprint, cut at 500 °/s", SPRINT, 500],
    ["sprint, cut at 250 °/s", SPRINT, 250],
  ])(
    "%s: flagged within half a second of the first reading cut, as the body speeds up",
    (_, motion, levelDeg) => {
      const level = levelDeg * DEG;
      const bench = new HealthBench({ motion: { ...CRUISE, yawDeg: 5 } });
      bench.run(10, cut(3, Z, level));
      expect(bench.raised).toEqual([]);
      bench.rig.motion = motion;
      let first = Number.NaN;
      while (bench.raised.length === 0 && bench.timeS < 12) {
        bench.run(0.01, cut(3, Z, level));
        if (Number.isNaN(first) && Math.abs(bench.rig.sweep.raw[3 * CHANNELS + Z]!) === level)
          first = bench.timeS;
      }
      expect(bench.raised).toEqual(["gyro saturation@3"]);
      expect(bench.timeS - first).toBeLessThanOrEqual(0.5);
      expect(bench.flags[0]!.detail).toMatch(/^flat-topped below full scale on z/);
    },
  );

  it("flags a limit that sets in during a beat, within that beat", () => {
    const bench = new HealthBench({ motion: CRUISE }).run(10);
    bench.run(1 / 1.6, cut(3, Z, 120 * DEG));
    expect(bench.raised).toEqual(["gyro saturation@3"]);
  });

  it("marks later readings on a level once found from their first on, and ends when the cut is gone", () => {
    const bench = new HealthBench({ motion: CRUISE }).run(10);
    const level = 120 * DEG;
    bench.run(2, cut(3, Z, level));
    for (let k = 0; k < 100; k++) {
      bench.run(0.01, cut(3, Z, level));
      const marked = (bench.rig.sweep.conditions[3]! & CONDITION.GYRO_CLIPPED) !== 0;
      expect(marked).toBe(Math.abs(bench.rig.sweep.raw[3 * CHANNELS + Z]!) >= level);
    }
    // Half a beat until the signal passes the level, and the quiet second.
    bench.run(1.5);
    expect(bench.openNow).toEqual([]);
  });

  it("flags an accelerometer limited to 1.5 g in its swing", () => {
    // 20 mm at 5 Hz is 2 g sideways.
    const bench = new HealthBench({ motion: SPRINT }).run(10);
    bench.run(0.5, cut(1, 3 + Y, 1.5 * 9.80665));
    expect(bench.raised).toEqual(["accel saturation@1"]);
  });

  it("does not take readings held by the hub for a cut", () => {
    const bench = new HealthBench({ motion: SPRINT }).run(1);
    const held = new Float64Array(CHANNELS);
    bench.run(20, (sweep) => {
      const tick = Math.round(sweep.timeS * 100);
      if (tick % 4 === 0) held.set(sweep.raw.subarray(0, CHANNELS));
      else sweep.raw.set(held, 0);
    });
    expect(bench.raised).toEqual([]);
  });

  it("does not take a slow crest after lost sweeps for a cut", () => {
    const motion = { ...REST, frequencyHz: 0.15, yawDeg: 80 };
    const bench = new HealthBench({ motion }).run(5);
    for (let k = 0; k < 120; k++) {
      bench.rig.lose(40);
      bench.run(0.1);
    }
    expect(bench.raised.filter((flag) => flag.includes("saturation"))).toEqual([]);
  });
});
