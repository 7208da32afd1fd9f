import { describe, expect, it } from "vitest";
import { Calibration, mountingMatrix } from "../../bridge/calibration/calibration.ts";
import { rotate } from "../../bridge/numeric/quaternion.ts";
import { sensorSchema } from "../../bridge/rig/rig.ts";
import {
  createSweep,
  HAS_ACCEL,
  HAS_GYRO,
  HAS_INERTIAL,
  HAS_MAG,
  HAS_ORIENTATION,
} from "../../bridge/sweep.ts";

/** A handful of double-precision products of numbers up to 50. */
const ROUNDING = 1e-13;

function place(extra: { mounting?: object; calibration?: object }) {
  return sensorSchema.parse({ name: "S", station: 0.5, model: "any", ...extra });
}

/** Calibrates one reading of all nine channels. */
function calibrate(extra: { mounting?: object; calibration?: object }, raw: number[]): number[] {
  const sweep = createSweep(1);
  sweep.raw.set(raw);
  sweep.present[0] = HAS_INERTIAL | HAS_MAG;
  new Calibration([place(extra)]).apply(sweep);
  return [...sweep.values];
}

function close(actual: readonly number[], expected: readonly number[]): void {
  expected.forEach((value, i) => {
    expect(Math.abs(actual[i]! - value), `channel ${i}`).toBeLessThanOrEqual(ROUNDING);
  });
}

describe("Calibration", () => {
  it("passes readings through a sensor that needs nothing", () => {
    const raw = [1, 2, 3, 4, 5, 6, 7, 8, 9];
    close(calibrate({}, raw), raw);
  });

  it("takes the gyroscope's bias off in degrees a second", () => {
    const calibration = { gyroBiasDegPerS: [90, 0, -180] };
    close(calibrate({ calibration }, [1, 0, 0, 0, 0, 0, 0, 0, 0]), [1 - Math.PI / 2, 0, Math.PI]);
  });

  it("takes the accelerometer's bias off before it scales", () => {
    const calibration = { accelBiasMPerS2: [0.5, -1, 0], accelScale: [2, 1, 0.5] };
    close(calibrate({ calibration }, [0, 0, 0, 1, 1, 10, 0, 0, 0]).slice(3, 6), [1, 2, 5]);
  });

  it("takes hard iron off before it applies the soft-iron matrix by rows", () => {
    const calibration = {
      magHardIronUT: [10, 0, -40],
      magSoftIron: [
        [1, 2, 0],
        [0, 1, 0],
        [0, 0, 3],
      ],
    };
    close(calibrate({ calibration }, [0, 0, 0, 0, 0, 0, 20, 5, -39]).slice(6), [20, 5, 3]);
  });

  it("corrects in sensor axes first and turns into body axes last", () => {
    // Turned a quarter to the left: the sensor's x axis looks along the body's y, its y along the body's -x.
    const mounting = { yawDeg: 90 };
    const calibration = { accelBiasMPerS2: [1, 0, 0], accelScale: [2, 1, 1] };
    close(calibrate({ mounting, calibration }, [0, 0, 0, 3, 7, 9, 0, 0, 0]).slice(3, 6), [-7, 4, 9]);
  });

  it.each([
    // Where the sensor's x, y and z axes look, by hand.
    ["upside down about the nose axis", { rollDeg: 180 }, [1, 0, 0], [0, -1, 0], [0, 0, -1]],
    ["facing backwards", { yawDeg: 180 }, [-1, 0, 0], [0, -1, 0], [0, 0, 1]],
    ["x axis down", { pitchDeg: 90 }, [0, 0, -1], [0, 1, 0], [1, 0, 0]],
    ["right side down", { rollDeg: 90 }, [1, 0, 0], [0, 0, 1], [0, -1, 0]],
    ["left, then rolled about its new x", { yawDeg: 90, rollDeg: 90 }, [0, 1, 0], [0, 0, 1], [1, 0, 0]],
    ["left, then pitched about its new y", { yawDeg: 90, pitchDeg: 90 }, [0, 0, -1], [-1, 0, 0], [0, 1, 0]],
  ])("places the sensor's axes when mounted %s", (_, mounting, x, y, z) => {
    close(calibrate({ mounting }, [1, 0, 0, 0, 1, 0, 0, 0, 1]), [...x, ...y, ...z]);
  });

  it("leaves parts that did not arrive at their last value", () => {
    const sweep = createSweep(2);
    const calibration = new Calibration([place({}), place({})]);
    sweep.raw.fill(1);
    sweep.present[0] = HAS_GYRO;
    sweep.present[1] = HAS_ACCEL | HAS_MAG;
    calibration.apply(sweep);
    expect([...sweep.values]).toEqual([1, 1, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 1, 1, 1, 1, 1, 1]);
  });
});

describe("mountingMatrix", () => {
  it("is a rotation for any angles", () => {
    const rows = mountingMatrix({ yawDeg: 33, pitchDeg: -71, rollDeg: 128 });
    const dot = (a: readonly number[], b: readonly number[]) => a.reduce((sum, v, i) => sum + v * b[i]!, 0);
    rows.forEach((a, i) => {
      rows.forEach((b, j) => {
        expect(Math.abs(dot(a, b) - (i === j ? 1 : 0))).toBeLessThanOrEqual(ROUNDING);
      });
    });
  });
});

describe("A quaternion fused on board", () => {
  it("is turned by the mounting: a vector's sensor coordinates and its body coordinates give the same in the earth", () => {
    const mounting = { yawDeg: 90, pitchDeg: 20, rollDeg: -35 };
    const sweep = createSweep(1);
    const own = [0.5, -0.5, 0.5, 0.5];
    sweep.onBoard.set(own);
    sweep.raw.set([1, 2, 3]);
    sweep.present[0] = HAS_GYRO | HAS_ORIENTATION;
    new Calibration([place({ mounting })]).apply(sweep);
    const bySensor = [0, 0, 0];
    const byBody = [0, 0, 0];
    rotate(bySensor, own, [1, 2, 3]);
    rotate(byBody, sweep.onBoardBody, sweep.values);
    close(byBody, bySensor);
  });

  it("is brought to unit length", () => {
    const sweep = createSweep(1);
    sweep.onBoard.set([0, 0, 0, 1.02]);
    sweep.present[0] = HAS_ORIENTATION;
    new Calibration([place({})]).apply(sweep);
    close([...sweep.onBoardBody], [0, 0, 0, 1]);
  });
});
