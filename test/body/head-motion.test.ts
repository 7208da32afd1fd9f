import { expect, test } from "vitest";
import { CONDITION, HAS_GYRO, HAS_MAG } from "../../bridge/sweep.ts";
import { type Swayed, SwayedBody } from "./swayed-body.ts";

const TURN = 2 * Math.PI;
const DEG = Math.PI / 180;
const SWAY_M = 0.03;

const swayAt = (frequencyHz: number) => (timeS: number) => SWAY_M * Math.sin(TURN * frequencyHz * timeS);
/** A wave that runs down the body, a wavelength to its length, from 6 to 20 degrees of yaw. */
const waveAt = (frequencyHz: number) => (station: number, timeS: number) =>
  (0.1 + 0.25 * station) * Math.sin(TURN * (frequencyHz * timeS - station) + 1);

const bodyAt = (frequencyHz: number, bends: boolean): Swayed => ({
  sway: swayAt(frequencyHz),
  ...(bends ? { yaw: waveAt(frequencyHz) } : {}),
});

test.each([0.5, 1, 2, 5].flatMap((hz) => [[hz, "straight"] as const, [hz, "bending"] as const]))(
  "a prescribed sway of 30 mm at %d Hz of a %s body comes back to 5 percent and 5 degrees",
  (frequencyHz, kind) => {
    const body = new SwayedBody(bodyAt(frequencyHz, kind === "bending"));
    // The inclination settles for some seconds, the fit for some beats.
    body.run(8 + 8 / frequencyHz);
    expect(body.head.held).toBeNull();
    const { amplitude, phase, astray } = body.measure(frequencyHz, Math.max(4, Math.round(4 * frequencyHz)));
    // The promise.
    expect(Math.abs(amplitude / SWAY_M - 1)).toBeLessThan(0.05);
    expect(Math.abs(phase)).toBeLessThan(5 * DEG);
    // Neither heave nor surge was there: a tenth of the sway, from biases, noise and the guess between two sensors.
    expect(astray).toBeLessThan(0.1 * SWAY_M);
    // The midline starts at the nose.
    expect(Math.hypot(...body.midline.positions.subarray(0, 3))).toBeCloseTo(
      Math.hypot(...body.head.displacement),
      12,
    );
  },
);

test("half way through a fade in, and at every sweep, the nose moves without a jump", () => {
  const body = new SwayedBody(bodyAt(1, true));
  let last = 0;
  let fastest = 0;
  body.run(20, () => {
    fastest = Math.max(fastest, Math.abs(body.head.displacement[1]! - last));
    last = body.head.displacement[1]!;
  });
  expect(body.head.held).toBeNull();
  // A sway of 30 mm at 1 Hz covers 1.9 mm in a sweep at its fastest; coming in over half a beat adds 0.6 mm.
  expect(fastest).toBeLessThan(0.003);
});

test("accelerometers that show gravity alone contradict the shape: the nose is held", () => {
  const body = new SwayedBody({ ...bodyAt(1.5, true), gravityAlone: true });
  body.run(8);
  body.run(20, () => {
    expect(body.head.held).toBe("sensors disagree");
    expect([...body.head.displacement]).toEqual([0, 0, 0]);
    expect([...body.midline.positions.subarray(0, 3)]).toEqual([0, 0, 0]);
  });
});

test("clipped or missing accelerations hold the nose gradually, and two whole sensors bring it back", () => {
  let whole = 6;
  const body = new SwayedBody({
    ...bodyAt(2, false),
    spoil({ present, conditions }) {
      for (let i = whole; i < 6; i++) {
        if (i % 2 === 0) conditions[i]! |= CONDITION.ACCEL_CLIPPED;
        else present[i] = HAS_GYRO | HAS_MAG;
      }
    },
  });
  body.run(12);
  expect(body.head.held).toBeNull();
  whole = 1;
  let last = body.head.displacement[1]!;
  body.run(16, () => {
    // 3.8 mm a sweep at most at 2 Hz; going within half a beat takes up to 1.2 mm off at once.
    expect(Math.abs(body.head.displacement[1]! - last)).toBeLessThan(0.005);
    last = body.head.displacement[1]!;
  });
  expect(body.head.held).toBe("readings missing");
  body.run(20);
  expect([...body.head.displacement]).toEqual([0, 0, 0]);
  whole = 2;
  body.run(28);
  expect(body.head.held).toBeNull();
  // Two sensors of six: biases and noise average less.
  expect(Math.abs(body.measure(2, 8).amplitude / SWAY_M - 1)).toBeLessThan(0.1);
});

test("wriggling without a beat holds the nose", () => {
  const body = new SwayedBody({
    sway: () => 0,
    yaw: (station, timeS) => {
      let yaw = 0;
      for (let k = 0; k < 6; k++)
        yaw += 0.1 * Math.sin(TURN * (0.53 + 0.437 * k + 0.0713 * station) * timeS + k * k + 5 * station);
      return yaw;
    },
  });
  let held = 0;
  body.run(30, () => {
    if (body.head.held !== null) held++;
  });
  // Now and then such a sum looks like a beat for a moment.
  expect(held / 3000).toBeGreaterThan(0.9);
});

test("a body that stops is at its mean place again, to nothing", () => {
  const stopS = 12;
  const sway = swayAt(2);
  const body = new SwayedBody({ sway: (timeS) => (timeS < stopS ? sway(timeS) : 0) });
  body.run(stopS);
  expect(body.head.held).toBeNull();
  body.run(stopS + 20);
  expect(body.head.held).toBe("no beat");
  expect([...body.head.displacement]).toEqual([0, 0, 0]);
});
