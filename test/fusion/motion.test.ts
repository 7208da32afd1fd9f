import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { createSweep, HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG, TRUST } from "../../bridge/sweep.ts";
import {
  advance,
  EARTH_FIELD,
  fillRow,
  headingError,
  inclinationError,
  oneSensor,
  product,
  RATE_HZ,
  rest,
  totalError,
  turned,
} from "./motion.ts";

/** Long enough a time constant that corrections vanish beside rounding: what remains is pure integration. */
const GYRO_ONLY = { accelTauS: 1e12, magTauS: 1e12, biasSigmaStart: 1e-12 };

/** A start at rest in level attitude, then an even turn in body axes, at the given times. */
function spin(times: readonly number[], rate: readonly number[], skip: (i: number) => boolean = () => false) {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "free", parameters: GYRO_ONLY });
  const sweep = oneSensor();
  fillRow(sweep, 0, [1, 0, 0, 0], [...rate]);
  let outputs: number[] = [];
  times.forEach((timeS, i) => {
    sweep.timeS = timeS;
    sweep.present[0] = i > 0 && skip(i) ? 0 : i === 0 ? HAS_INERTIAL : HAS_GYRO;
    fusion.step(sweep);
    outputs = [...outputs, totalError(fusion, turned(rate.map((w) => w * (timeS - times[0]!))))];
  });
  return { fusion, worst: Math.max(...outputs) };
}

const regular = Array.from({ length: 1000 }, (_, i) => i / RATE_HZ);

describe("strapdown integration", () => {
  it("follows the closed form of an even turn to 1e-9 rad", () => {
    expect(spin(regular, [1.1, -2.3, 3.7]).worst).toBeLessThan(1e-9);
  });

  it("follows it as well at uneven times: jittered steps equal regular ones", () => {
    const jittered = regular.map((timeS, i) => timeS + 0.004 * Math.sin(i * 12.9898));
    expect(spin(jittered, [1.1, -2.3, 3.7]).worst).toBeLessThan(1e-9);
  });

  it("bridges 20 lost samples of an even turn exactly, during the gap and after it", () => {
    const { worst, fusion } = spin(regular, [1.1, -2.3, 3.7], (i) => i >= 300 && i < 320);
    expect(worst).toBeLessThan(1e-9);
    expect(fusion.bridged[0]).toBe(0);
  });

  it("bridges lost samples of an even angular acceleration exactly once two readings have followed", () => {
    const fusion = new ChainFusion({
      sensorCount: 1,
      rateHz: RATE_HZ,
      heading: "free",
      parameters: GYRO_ONLY,
    });
    const sweep = oneSensor();
    // A reading is the mean rate over the interval that it ends.
    const angle = (t: number) => 0.8 * t + 1.5 * t * t;
    for (let i = 0; i <= 122; i++) {
      const t = i / RATE_HZ;
      const mean = i === 0 ? 0.8 : (angle(t) - angle(t - 1 / RATE_HZ)) * RATE_HZ;
      fillRow(sweep, 0, [1, 0, 0, 0], [0, 0, mean]);
      sweep.timeS = t;
      sweep.present[0] = i >= 100 && i < 120 ? 0 : i === 0 ? HAS_INERTIAL : HAS_GYRO;
      fusion.step(sweep);
    }
    expect(totalError(fusion, turned([0, 0, angle(1.22)]))).toBeLessThan(1e-9);
  });

  it("keeps unit length to 1e-12 after a million steps", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: 1000, heading: "magnetic" });
    const sweep = createSweep(1);
    sweep.present[0] = HAS_INERTIAL | HAS_MAG;
    for (let i = 0; i < 1_000_000; i++) {
      sweep.timeS = i / 1000;
      const a = i * 0.0137;
      sweep.values.set([
        Math.sin(a),
        2 * Math.cos(0.7 * a),
        0.3,
        1,
        2,
        9 + Math.sin(a),
        10,
        20 * Math.cos(a),
        -40,
      ]);
      fusion.step(sweep);
    }
    expect(Math.abs(Math.hypot(...fusion.orientations) - 1)).toBeLessThan(1e-12);
  }, 240_000);
});

describe("predictions", () => {
  it("are marked bridged, for as long as a due reading is missing", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const sweep = oneSensor();
    rest(fusion, sweep, 15, [1, 0, 0, 0]);
    sweep.present[0] = 0;
    advance(fusion, sweep);
    expect([fusion.bridged[0], fusion.trust[0]]).toEqual([1, TRUST.BRIDGED]);
    sweep.present[0] = HAS_INERTIAL | HAS_MAG;
    advance(fusion, sweep);
    expect([fusion.bridged[0], fusion.trust[0]]).toEqual([0, TRUST.GOOD]);
  });

  it("end in a lost orientation that stands still, and start anew with the first reading after", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const sweep = oneSensor();
    rest(fusion, sweep, 15, [1, 0, 0, 0]);
    sweep.present[0] = 0;
    for (let i = 0; i < 1.2 * RATE_HZ; i++) advance(fusion, sweep);
    expect(fusion.trust[0]).toBe(TRUST.LOST);
    const held = [...fusion.orientations];
    advance(fusion, sweep);
    expect([...fusion.orientations]).toEqual(held);
    const truth = turned([0.5, -0.8, 2]);
    sweep.present[0] = HAS_INERTIAL | HAS_MAG;
    rest(fusion, sweep, 0.01, truth);
    expect(totalError(fusion, truth)).toBeLessThan(1e-6); // exact readings: rounding
    expect(fusion.trust[0]).toBe(TRUST.SETTLING);
  });

  it("undo a sampling offset with the current rate", () => {
    const rate = [0, 0, 2];
    const offsetS = 0.003;
    const fusion = new ChainFusion({
      sensorCount: 2,
      rateHz: RATE_HZ,
      heading: "free",
      samplingOffsetsS: [0, offsetS],
      parameters: GYRO_ONLY,
    });
    const sweep = createSweep(2);
    sweep.present.fill(HAS_INERTIAL);
    for (let i = 0; i < 300; i++) {
      sweep.timeS = i / RATE_HZ;
      // Both start at yaw 0 by their own first reading, so the late one is behind by the turn within its offset.
      for (const sensor of [0, 1]) fillRow(sweep, sensor, [1, 0, 0, 0], rate);
      fusion.step(sweep);
    }
    const turn = (2 * 299) / RATE_HZ;
    expect(totalError(fusion, turned([0, 0, turn]), 0)).toBeLessThan(1e-9);
    expect(totalError(fusion, turned([0, 0, turn - 2 * offsetS]), 1)).toBeLessThan(1e-9);
  });

  it("carry a slower sensor from reading to reading without calling them bridged", () => {
    const fusion = new ChainFusion({
      sensorCount: 1,
      rateHz: RATE_HZ,
      heading: "magnetic",
      sensorRatesHz: [25],
    });
    const sweep = oneSensor();
    let worst = 0;
    for (let i = 0; i <= 20 * RATE_HZ; i++) {
      const truth = turned([0, 0, (0.5 * i) / RATE_HZ]);
      // Specific force and field are means over the sensor's interval too: those of its middle.
      fillRow(sweep, 0, turned([0, 0, (0.5 * Math.max(0, i - 2)) / RATE_HZ]), [0, 0, 0.5]);
      sweep.present[0] = i % 4 === 0 ? HAS_INERTIAL | HAS_MAG : 0;
      sweep.timeS = i / RATE_HZ;
      fusion.step(sweep);
      worst = Math.max(worst, totalError(fusion, truth));
      expect(fusion.bridged[0]).toBe(0);
    }
    expect(worst * DEG_PER_RAD).toBeLessThan(0.1); // even turn, exact readings: only the bias estimate's wander
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
  });
});

describe("a swimming chain", () => {
  it("gives each sensor its own orientation within a degree, magnetometers at a fifth of the rate", () => {
    const count = 4;
    const fusion = new ChainFusion({ sensorCount: count, rateHz: RATE_HZ, heading: "magnetic" });
    const sweep = createSweep(count);
    const yaw = (sensor: number, t: number) => 0.6 * Math.sin(2 * Math.PI * 1.5 * t - sensor);
    const mean = (sensor: number, t: number) => (yaw(sensor, t) - yaw(sensor, t - 1 / RATE_HZ)) * RATE_HZ;
    const mount = (sensor: number) => turned([0.3 * sensor, 0.1, 0]);
    for (let i = 0; i < 30 * RATE_HZ; i++) {
      const t = i / RATE_HZ;
      sweep.timeS = t;
      sweep.present.fill(i % 5 === 0 ? HAS_INERTIAL | HAS_MAG : HAS_INERTIAL);
      for (let sensor = 0; sensor < count; sensor++) {
        const truth = product(turned([0, 0, yaw(sensor, t)]), mount(sensor));
        const still = product(turned([0, 0, 0]), mount(sensor));
        const rate = bodyRate(still, mean(sensor, t));
        fillRow(sweep, sensor, truth, rate);
      }
      fusion.step(sweep);
    }
    for (let sensor = 0; sensor < count; sensor++) {
      const truth = product(turned([0, 0, yaw(sensor, sweep.timeS)]), mount(sensor));
      expect(totalError(fusion, truth, sensor) * DEG_PER_RAD).toBeLessThan(1);
      expect(fusion.trust[sensor]).toBe(TRUST.GOOD);
    }
  });
});

describe("missing parts and bad numbers", () => {
  const truth = turned([0.3, 0.2, 1]);
  const start = () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const sweep = oneSensor();
    rest(fusion, sweep, 12, truth);
    return { fusion, sweep };
  };

  it.each([
    ["not-a-number", Number.NaN],
    ["infinite", Infinity],
    ["zero", 0],
  ])("do not poison the state: %s readings in any channel", (_, bad) => {
    const { fusion, sweep } = start();
    const good = sweep.values.slice();
    for (let i = 0; i < 90; i++) {
      sweep.values.set(good);
      if (bad === 0) sweep.values.fill(0, 3 * (i % 3), 3 * (i % 3) + 3);
      else sweep.values[i % 9] = bad;
      advance(fusion, sweep);
      expect(totalError(fusion, truth)).toBeLessThan(1e-6);
    }
    sweep.values.set(good);
    advance(fusion, sweep);
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
    expect(totalError(fusion, truth)).toBeLessThan(1e-6);
  });

  it("do not poison the state: a time that stands still, goes back, or is not a number", () => {
    const { fusion, sweep } = start();
    const before = [...fusion.orientations];
    const timeS = sweep.timeS;
    for (const bad of [timeS, timeS - 1, Number.NaN]) {
      sweep.timeS = bad;
      fusion.step(sweep);
      expect([...fusion.orientations]).toEqual(before);
    }
    sweep.timeS = timeS;
    advance(fusion, sweep);
    expect(totalError(fusion, truth)).toBeLessThan(1e-6);
  });

  it("do not start an orientation: no reading, no accelerometer, a zero accelerometer", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const sweep = oneSensor();
    for (const present of [0, HAS_GYRO | HAS_MAG, HAS_ACCEL | HAS_MAG, HAS_INERTIAL]) {
      sweep.present[0] = present;
      advance(fusion, sweep);
      expect([...fusion.orientations]).toEqual([1, 0, 0, 0]);
      expect(fusion.trust[0]).toBe(TRUST.LOST);
    }
  });

  it("leave the gyroscope to run alone while only the accelerometer is missing", () => {
    const { fusion, sweep } = start();
    sweep.present[0] = HAS_GYRO;
    for (let i = 1; i <= 50; i++) {
      fillRow(sweep, 0, truth, [0, 0, 1]);
      advance(fusion, sweep);
    }
    expect(totalError(fusion, product(truth, turned([0, 0, 0.5])))).toBeLessThan(1e-3); // bias still settling
  });

  it("pull a body turned over while unseen upright again, through the exactly opposite direction", () => {
    const { fusion, sweep } = start();
    const over = product(truth, turned([Math.PI, 0, 0]));
    rest(fusion, sweep, 60, over);
    expect(inclinationError(fusion, over) * DEG_PER_RAD).toBeLessThan(0.5);
  });

  it("correct no heading from a field that points straight down", () => {
    const { fusion, sweep } = start();
    const before = headingError(fusion, truth);
    fillRow(sweep, 0, truth, [0, 0, 0], [0, 0, -Math.hypot(...EARTH_FIELD)]);
    for (let i = 0; i < 5 * RATE_HZ; i++) advance(fusion, sweep);
    expect(Math.abs(headingError(fusion, truth) - before)).toBeLessThan(1e-3);
  });
});

describe("reset", () => {
  it("makes the next run equal to a first one, bit for bit", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const outputs = [0, 1].map(() => {
      const sweep = oneSensor();
      for (let i = 0; i < 500; i++) {
        fillRow(sweep, 0, turned([0, 0.2, i / 50]), [0, 0.1, 2]);
        sweep.present[0] = i % 17 === 0 ? 0 : HAS_INERTIAL | HAS_MAG;
        advance(fusion, sweep);
      }
      const output = [...fusion.orientations];
      fusion.reset();
      return output;
    });
    expect(outputs[1]).toEqual(outputs[0]);
    expect([...fusion.orientations]).toEqual([1, 0, 0, 0]);
  });
});

/** Body-axes rate of a turn about the earth's vertical at `rate`, for a body at `orientation` up to that turn. */
function bodyRate(orientation: number[], rate: number): number[] {
  const [w, x, y, z] = orientation as [number, number, number, number];
  return [2 * (x * z - w * y), 2 * (y * z + w * x), 1 - 2 * (x * x + y * y)].map((c) => c * rate);
}
