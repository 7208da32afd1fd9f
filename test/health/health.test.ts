import { describe, expect, it } from "vitest";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, NINE_AXIS, REST, SPRINT } from "../support/synthetic-sweeps.ts";

describe("a healthy run raises no flag", () => {
  it.each([1, 2, 3])("cruising for ten minutes, six sensors at 100 Hz, seed %i", (seed) => {
    expect(new HealthBench({ seed, motion: CRUISE }).run(600).raised).toEqual([]);
  });

  it.each([1, 2, 3])("sprinting at 5 Hz with rates near 790 °/s, seed %i", (seed) => {
    expect(new HealthBench({ seed, motion: SPRINT }).run(120).raised).toEqual([]);
  });

  it.each([1, 2, 3])("lying still, then swimming, then still, seed %i", (seed) => {
    const bench = new HealthBench({ seed, motion: REST }).run(60);
    bench.rig.motion = CRUISE;
    bench.run(60);
    bench.rig.motion = REST;
    expect(bench.run(60).raised).toEqual([]);
  });

  it.each([0.1, 0.25, 0.5, 1, 3])("swaying in yaw alone at %d Hz", (frequencyHz) => {
    const motion = { ...REST, frequencyHz, yawDeg: 40 };
    expect(new HealthBench({ motion }).run(120).raised).toEqual([]);
  });

  it("sensors whose noise is below a count, or 12-bit, at rest and in motion", () => {
    const coarse = {
      ...NINE_AXIS,
      gyro: { ...NINE_AXIS.gyro, rangeDegPerS: 2000 },
      accel: { ...NINE_AXIS.accel, bits: 12 },
    };
    const bench = new HealthBench({ model: coarse, motion: REST }).run(60);
    bench.rig.motion = { ...REST, frequencyHz: 0.2, yawDeg: 30 };
    bench.run(60);
    bench.rig.motion = SPRINT;
    expect(bench.run(60).raised).toEqual([]);
  });

  it("six-axis sensors: no field, no magnetic flag", () => {
    const { mag: _, ...sixAxis } = NINE_AXIS;
    const bench = new HealthBench({ model: sixAxis }).run(60);
    expect(bench.raised).toEqual([]);
    expect([...bench.health.fieldOff].every(Number.isNaN)).toBe(true);
  });
});

describe("the numbers for the display", () => {
  it("are those of a full, quiet run", () => {
    const { health } = new HealthBench({ motion: REST }).run(5);
    expect(health.sweepsPerS).toBe(100);
    expect(health.lostShare60).toBe(0);
    expect([...health.delivered60]).toEqual([1, 1, 1, 1, 1, 1]);
    // 1 g of 8 g is in use; the gyroscope shows its noise alone.
    for (const free of health.accelHeadroom) expect(free).toBeCloseTo(7 / 8, 2);
    for (const free of health.gyroHeadroom) expect(free).toBeGreaterThan(0.999);
    // Noise of 0.4 µT in 50, smoothed over some thirty readings.
    for (const off of health.fieldOff) expect(off).toBeLessThan(0.01);
  });
});
