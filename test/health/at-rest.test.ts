import { describe, expect, it } from "vitest";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { ACCEL, CHANNELS, GYRO, MAG, type Sweep } from "../../bridge/sweep.ts";
import { HealthBench } from "../support/health-bench.ts";
import { CRUISE, NINE_AXIS, REST } from "../support/synthetic-sweeps.ts";

const at = (sensor: number, channel: number) => sensor * CHANNELS + channel;
const still = (options = {}) => new HealthBench({ motion: REST, ...options });

/** Adds numbers that alternate as noise does, each with its own sign, to the first channels of a part. */
function noise(sensor: number, channel: number, size: number) {
  let state = 1;
  return (sweep: Sweep) => {
    for (let k = 0; k < 3; k++) {
      state = (state * 48_271) % 2_147_483_647;
      sweep.raw[at(sensor, channel + k)]! += size * (state / 1_073_741_823.5 - 1);
    }
  };
}

describe("a body at rest", () => {
  it("raises nothing, and is measured", () => {
    const bench = still().run(40);
    expect(bench.raised).toEqual([]);
    const { run, gyroInstability } = bench.health.rest;
    expect(run.stillS[2]).toBe(39);
    expect(run.gravity[2]).toBeCloseTo(9.80665, 3);
    expect(run.fieldUT[2]).toBeCloseTo(50, 1);
    // The synthetic gyroscope has no bias; 39 s of its noise leave 0.001 °/s.
    for (let k = 0; k < 3; k++) expect(Math.abs(run.gyroBias[6 + k]! / RAD_PER_DEG)).toBeLessThan(0.004);
    // Some 500 independent differences: 3 %, three times that, and the noisiest of three is above the mean.
    expect(Math.abs(run.gyroNoise[2]! / (0.006 * RAD_PER_DEG) - 1.03)).toBeLessThan(0.1);
    // White noise alone: its deviation at 6.4 s over 0.664, 9 °/h, give or take a half (six averages).
    expect((gyroInstability[2]! / RAD_PER_DEG) * 3600).toBeLessThan(14);
  });

  it("is not judged while it moves, nor before it has lain for three seconds", () => {
    const heavy = (sweep: Sweep) => {
      sweep.raw[at(2, ACCEL + 2)]! *= 1.1;
    };
    const bench = still().run(2.9, heavy);
    expect(bench.raised).toEqual([]);
    const swimming = new HealthBench({ motion: CRUISE }).run(20, heavy);
    expect(swimming.raised).toEqual([]);
    expect(swimming.health.rest.run.stillS[2]).toBe(0);
  });
});

describe("what is out of specification", () => {
  it("noise that is three times the model's, though such a sensor scatters as if it moved", () => {
    // Uniform numbers have a deviation of 1/√3: 1.7 °/s of them are 23 times the model's noise.
    const bench = still().run(4, noise(2, GYRO, 1.7 * RAD_PER_DEG));
    expect(bench.raised).toEqual(["noise at rest@2"]);
    expect(bench.flags[0]!.detail).toMatch(/^gyro 2[0-9]\.\d times as noisy/);
    bench.run(7);
    expect(bench.openNow).toEqual([]);
  });

  it("a gyroscope whose bias wanders more than its model says", () => {
    const gyro = { ...NINE_AXIS.gyro, biasInstabilityDegPerH: 20 };
    const wander = (sweep: Sweep) => {
      sweep.raw[at(2, GYRO)]! += 0.05 * RAD_PER_DEG * Math.sin((2 * Math.PI * sweep.timeS) / 16);
    };
    const bench = still({ model: { ...NINE_AXIS, gyro } }).run(70, wander);
    expect(bench.raised).toEqual(["noise at rest@2"]);
    expect(bench.flags[0]!.detail).toMatch(/^gyro bias wanders by \d+ °\/h/);
  });

  it("a gyroscope's bias beyond the data sheet, and stays said while the body swims", () => {
    const offset = (sweep: Sweep) => {
      sweep.raw[at(4, GYRO + 2)]! += 3 * RAD_PER_DEG;
    };
    const bench = still().run(4, offset);
    expect(bench.raised).toEqual(["gyro bias@4"]);
    expect(bench.flags[0]!.detail).toBe("turns at 3.00 °/s at rest");
    bench.rig.motion = CRUISE;
    bench.run(5);
    expect(bench.openNow).toEqual(["gyro bias@4"]);
    bench.rig.motion = REST;
    bench.run(7);
    expect(bench.openNow).toEqual([]);
  });

  it("gravity, where the site's is known and where it is not", () => {
    const light = (sweep: Sweep) => {
      for (let k = 0; k < 3; k++) sweep.raw[at(0, ACCEL + k)]! *= 0.94;
    };
    const bench = still().run(4, light);
    expect(bench.raised).toEqual(["gravity at rest@0"]);
    expect(bench.flags[0]!.detail).toBe("gravity reads 9.22 m/s², −60 mg off");
  });

  it("the field's norm, off the site's and off the others'", () => {
    const strong = (sensors: readonly number[]) => (sweep: Sweep) => {
      for (const i of sensors) for (let k = 0; k < 3; k++) sweep.raw[at(i, MAG + k)]! *= 1.08;
    };
    expect(still().run(4, strong([3])).raised).toEqual(["field at rest@3"]);
    // Alike for all: the place is so, and no sensor's fault.
    expect(still().run(4, strong([0, 1, 2, 3, 4, 5])).raised).toEqual([]);
    expect(still({ expectedField: null }).run(4, strong([3])).raised).toEqual(["field at rest@3"]);
  });
});

describe("what is not rest", () => {
  it.each([
    ["turning evenly about the vertical", GYRO + 2, () => 2 * RAD_PER_DEG, true],
    ["a slow sway that repeats with the slices", GYRO + 2, (t: number) => Math.sin(4 * Math.PI * t), false],
    ["knocks", ACCEL, (t: number) => (Math.round(t * 100) % 10 === 0 ? 40 : 0), false],
  ])("%s", (_, channel, signal, turns) => {
    const bench = still().run(8, (sweep) => {
      sweep.raw[at(1, channel)]! += signal(sweep.timeS);
      if (!turns) return;
      const angle = 2 * RAD_PER_DEG * sweep.timeS;
      const horizontal = 50 * Math.cos(69 * RAD_PER_DEG);
      sweep.raw[at(1, MAG)]! += horizontal * Math.sin(angle);
      sweep.raw[at(1, MAG + 1)]! += horizontal * (Math.cos(angle) - 1);
    });
    expect(bench.health.rest.run.stillS[1]).toBe(0);
  });
});
