import { describe, expect, it } from "vitest";
import { CHANNELS, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { REST } from "../support/synthetic-sweeps.ts";

const DEG = Math.PI / 180;
const Z = 2;

/** One reading every half second at this share of the gyroscope's range. */
function peaks(sensor: number, share: number) {
  return (sweep: Sweep) => {
    if (Math.round(sweep.timeS * 100) % 50 === 0) sweep.raw[sensor * CHANNELS + Z] = share * 1000 * DEG;
  };
}

describe("low headroom", () => {
  it("cautions within half a second on the right sensor, names part, axis and what is left, and ends", () => {
    const bench = new HealthBench({ motion: REST }).run(2);
    bench.run(0.5, peaks(4, 0.93));
    expect(bench.raised).toEqual(["low headroom@4"]);
    expect(bench.flags[0]).toMatchObject({ severity: "caution", detail: "gyro: 7 % left on z" });
    bench.run(5, peaks(4, 0.93)).run(1.2);
    expect(bench.openNow).toEqual([]);
    expect(bench.raised).toHaveLength(1);
  });

  it("watches the accelerometer as well", () => {
    const bench = new HealthBench({ motion: REST }).run(2);
    bench.run(1, (sweep) => {
      if (Math.round(sweep.timeS * 100) % 50 === 0) sweep.raw[CHANNELS + 3] = -7.5 * 9.80665;
    });
    expect(bench.flags[0]).toMatchObject({ sensor: 1, detail: "accel: 6 % left on x" });
  });

  it("lets exactly the threshold pass and flags what is under it", () => {
    const run = (share: number) => new HealthBench({ motion: REST }).run(2, peaks(0, share)).raised;
    expect(run(0.9)).toEqual([]);
    expect(run(0.901)).toEqual(["low headroom@0"]);
  });

  it("gives way to saturation, and comes back when that has ended and little is left", () => {
    const bench = new HealthBench({ motion: REST }).run(2);
    bench.run(2, peaks(0, 0.95));
    expect(bench.openNow).toEqual(["low headroom@0"]);
    bench.run(1, peaks(0, 1));
    expect(bench.openNow).toEqual(["gyro saturation@0"]);
    bench.run(3, peaks(0, 0.95));
    expect(bench.openNow).toEqual(["low headroom@0"]);
  });

  it("shows the share free over the last second, 0 at full scale and below", () => {
    const bench = new HealthBench({ motion: REST }).run(1, peaks(0, 0.6));
    expect(bench.health.gyroHeadroom[0]).toBeCloseTo(0.4, 6);
    bench.run(1, peaks(0, 1.01));
    expect(bench.health.gyroHeadroom[0]).toBe(0);
  });
});
