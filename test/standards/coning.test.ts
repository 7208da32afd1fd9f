/**
 * Strapdown integration against the closed form of a coning motion: the axis of a body goes round a cone while the body
 * does not turn about it. The classical test of such algorithms: J. E. Bortz, "A new mathematical formulation for strapdown
 * inertial navigation", IEEE Trans. Aerosp. Electron. Syst. AES-7(1), 1971, 61-66; P. G. Savage, "Strapdown inertial
 * navigation integration algorithm design part 1: attitude algorithms", J. Guid. Control Dyn. 21(1), 1998, 19-28 (both
 * from memory).
 *
 * Orientation: [cos(a/2), sin(a/2) cos wt, sin(a/2) sin wt, 0], a the cone's half angle, w its rate. Its angular rate in
 * body axes is [-w sin a sin wt, w sin a cos wt, -w (1 - cos a)], whose mean over a step has a closed form too.
 */
import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { createSweep, HAS_GYRO, HAS_INERTIAL } from "../../bridge/sweep.ts";
import { totalError } from "../fusion/motion.ts";

const HALF_ANGLE = 10 * RAD_PER_DEG;
/** Five turns round the cone a second: a fast tailbeat's wobble. */
const CONE_RATE = 2 * Math.PI * 5;

const orientation = (t: number) => [
  Math.cos(HALF_ANGLE / 2),
  Math.sin(HALF_ANGLE / 2) * Math.cos(CONE_RATE * t),
  Math.sin(HALF_ANGLE / 2) * Math.sin(CONE_RATE * t),
  0,
];

/** Mean angular rate between two times. */
function meanRate(from: number, to: number): number[] {
  const sine = Math.sin(HALF_ANGLE) / (to - from);
  return [
    sine * (Math.cos(CONE_RATE * to) - Math.cos(CONE_RATE * from)),
    sine * (Math.sin(CONE_RATE * to) - Math.sin(CONE_RATE * from)),
    -CONE_RATE * (1 - Math.cos(HALF_ANGLE)),
  ];
}

/** Error after ten seconds, rad. */
function driftOver10s(rateHz: number): number {
  const fusion = new ChainFusion({
    sensorCount: 1,
    rateHz,
    heading: "free",
    parameters: { accelTauS: 1e12, biasSigmaStart: 1e-12 }, // gyroscope alone
  });
  const sweep = createSweep(1);
  // Starts level with the nose at east: the true start is half an angle away, a constant turn on the outer side.
  let start: number[] = [];
  for (let i = 0; i <= 10 * rateHz; i++) {
    const t = i / rateHz;
    sweep.timeS = t;
    sweep.present[0] = i === 0 ? HAS_INERTIAL : HAS_GYRO;
    sweep.values.set(i === 0 ? [0, 0, 0, 0, 0, 9.81] : meanRate(t - 1 / rateHz, t));
    fusion.step(sweep);
    if (i === 0) start = orientation(0);
  }
  const [w, x, y, z] = start as [number, number, number, number];
  const [a, b, c, d] = orientation(10) as [number, number, number, number];
  // The turn since the start: conjugate(start) times the end.
  return totalError(fusion, [
    w * a + x * b + y * c + z * d,
    w * b - x * a - y * d + z * c,
    w * c + x * d - y * a - z * b,
    w * d - x * c + y * b - z * a,
  ]);
}

describe("a coning motion", () => {
  it("is followed to 0.1 degrees over ten seconds at 200 Hz, where the mean rate alone drifts by a degree and more", () => {
    // What the mean rate leaves out, to first order: w (w T sin a)² / 12 T a second with steps T.
    const step = 1 / 200;
    const leftOut = (10 * CONE_RATE * (CONE_RATE * step * Math.sin(HALF_ANGLE)) ** 2) / 12;
    expect(leftOut / RAD_PER_DEG).toBeGreaterThan(1);
    expect(driftOver10s(200) / RAD_PER_DEG).toBeLessThan(0.1);
  });

  it("is followed with an error of fourth order: halving the step leaves a sixteenth", () => {
    const ratio = driftOver10s(200) / driftOver10s(400);
    expect(ratio).toBeGreaterThan(12);
    expect(ratio).toBeLessThan(20);
  });
});
