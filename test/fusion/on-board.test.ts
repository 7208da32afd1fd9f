import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { HAS_INERTIAL, HAS_ORIENTATION, type Sweep, TRUST } from "../../bridge/sweep.ts";
import { advance, fillRow, oneSensor, product, RATE_HZ, totalError, turned } from "./motion.ts";

const newFusion = () => new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "free" });
const attitude = product(turned([0, 0, 1.2]), turned([0.3, -0.2, 0]));

/** A sweep whose sensor gives its own orientation, and raw readings too if asked. */
function own(sweep: Sweep, q: readonly number[], withRaw: boolean): void {
  sweep.onBoardBody.set(q);
  sweep.present[0] = HAS_ORIENTATION | (withRaw ? HAS_INERTIAL : 0);
}

/** Stands for some seconds with ours level and east, and the sensor's own as given. */
function compare(seconds: number, ownAt: (timeS: number) => number[]) {
  const fusion = newFusion();
  const sweep = oneSensor();
  fillRow(sweep, 0, [1, 0, 0, 0], [0, 0, 0]);
  for (let i = 0; i < seconds * RATE_HZ; i++) {
    own(sweep, ownAt(sweep.timeS), true);
    advance(fusion, sweep);
  }
  return { tiltDeg: fusion.onBoard.tilt[0]! * DEG_PER_RAD, turnDeg: fusion.onBoard.turn[0]! * DEG_PER_RAD };
}

describe("a sensor that sends only its own orientation", () => {
  it("is taken as it is, good, and marked", () => {
    const fusion = newFusion();
    const sweep = oneSensor();
    own(sweep, attitude, false);
    advance(fusion, sweep);
    expect(totalError(fusion, attitude)).toBeLessThan(1e-12); // copied
    expect([fusion.trust[0], fusion.bridged[0], fusion.onBoard.used[0]]).toEqual([
      TRUST.FUSED_ON_BOARD,
      0,
      1,
    ]);
    expect(fusion.onBoard.tilt[0]).toBeNaN();
  });

  it("is bridged when one is missing, and lost after a second without", () => {
    const fusion = newFusion();
    const sweep = oneSensor();
    own(sweep, attitude, false);
    advance(fusion, sweep);
    sweep.present[0] = 0;
    advance(fusion, sweep);
    expect([fusion.trust[0], fusion.bridged[0]]).toEqual([TRUST.BRIDGED, 1]);
    for (let i = 0; i < 1.1 * RATE_HZ; i++) advance(fusion, sweep);
    expect([fusion.trust[0], fusion.onBoard.used[0]]).toEqual([TRUST.LOST, 0]);
    expect(totalError(fusion, attitude)).toBeLessThan(1e-12); // stands still
  });

  it("gives way to ours when raw readings come, without a jump", () => {
    const fusion = newFusion();
    const sweep = oneSensor();
    own(sweep, attitude, false);
    advance(fusion, sweep);
    fillRow(sweep, 0, attitude, [0, 0, 0]);
    own(sweep, attitude, true);
    advance(fusion, sweep);
    expect(fusion.onBoard.used[0]).toBe(0);
    expect(totalError(fusion, attitude)).toBeLessThan(1e-6); // exact readings: rounding
  });
});

describe("a sensor that sends both", () => {
  it("shows ours, and by how much its own inclination differs", () => {
    const { tiltDeg, turnDeg } = compare(10, () => turned([0.2, 0, 0]));
    expect(tiltDeg).toBeCloseTo(0.2 * DEG_PER_RAD, 6);
    expect(turnDeg).toBeLessThan(1e-6);
  });

  it("may have another north: a steady difference of heading is none", () => {
    const { tiltDeg, turnDeg } = compare(10, () => turned([0, 0, 3]));
    expect(tiltDeg).toBeLessThan(1e-6);
    expect(turnDeg).toBeLessThan(1e-6);
  });

  it("shows a heading that swings against ours as RMS", () => {
    const { turnDeg } = compare(30, (t) => turned([0, 0, 3 + 0.2 * Math.sin(2 * Math.PI * 2 * t)]));
    // Amplitude / √2; the average over one second of a beat of 2 Hz ripples by 1 / (2 x 2 π 4) = 2 %.
    expect(turnDeg / ((0.2 * DEG_PER_RAD) / Math.SQRT2)).toBeGreaterThan(0.95);
    expect(turnDeg / ((0.2 * DEG_PER_RAD) / Math.SQRT2)).toBeLessThan(1.05);
  });
});
