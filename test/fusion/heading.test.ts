import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { CONDITION, createSweep, HAS_INERTIAL, type Sweep, TRUST } from "../../bridge/sweep.ts";
import {
  advance,
  EARTH_FIELD,
  fillRow,
  headingError,
  oneSensor,
  product,
  RATE_HZ,
  rest,
  totalError,
  turned,
  type Vector,
} from "./motion.ts";

/** A body that weaves about the vertical: the fusion sees motion, so a reference field is taken. */
function weave(
  fusion: ChainFusion,
  sweep: Sweep,
  seconds: number,
  fieldAt: (timeS: number) => Vector,
): number {
  const yaw = (t: number) => 0.8 * Math.sin(2 * Math.PI * 0.5 * t);
  let worst = 0;
  for (let i = 0; i < seconds * RATE_HZ; i++) {
    const t = sweep.timeS + 1 / RATE_HZ;
    const truth = turned([0, 0, yaw(t)]);
    const mean = (yaw(t) - yaw(t - 1 / RATE_HZ)) * RATE_HZ;
    fillRow(sweep, 0, truth, [0, 0, mean], fieldAt(t));
    advance(fusion, sweep);
    worst = Math.max(worst, Math.abs(headingError(fusion, truth)));
  }
  return worst * DEG_PER_RAD;
}

const undisturbed = () => EARTH_FIELD;
/** Iron nearby: turned by some 60 degrees, and stronger. */
const disturbed = () => [40, 20, -50];

function settled() {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
  const sweep = oneSensor();
  weave(fusion, sweep, 30, undisturbed);
  expect(fusion.trust[0]).toBe(TRUST.GOOD);
  return { fusion, sweep };
}

describe("magnetic heading", () => {
  it("finds north from a single reading", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });
    const truth = turned([0.4, -0.3, 2.5]);
    rest(fusion, oneSensor(), 0.01, truth);
    expect(totalError(fusion, truth)).toBeLessThan(1e-6);
  });

  it("stays within two degrees through 15 s of a disturbance that would turn it by 60, and says so", () => {
    const { fusion, sweep } = settled();
    expect(weave(fusion, sweep, 15, disturbed)).toBeLessThan(2);
    expect(fusion.trust[0]).toBe(TRUST.HEADING_UNAIDED);
    expect(weave(fusion, sweep, 5, undisturbed)).toBeLessThan(2);
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
  });

  it("takes a steady new field for the Earth's after 20 s of motion in it", () => {
    const { fusion, sweep } = settled();
    weave(fusion, sweep, 100, disturbed);
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
    // Seven time constants of 9 s after acceptance: the heading is the new field's.
    const north = Math.atan2(disturbed()[0]!, disturbed()[1]!);
    expect(
      Math.abs(headingError(fusion, turned([0, 0, 0.8 * Math.sin(Math.PI * sweep.timeS) + north]))),
    ).toBeLessThan(0.02);
  });

  it("does not trust a field that the health stage has flagged, however steady", () => {
    const { fusion, sweep } = settled();
    sweep.conditions[0] = CONDITION.MAG_DISTURBED;
    // A field that the reference alone would let pass: the same norm and dip, turned by a radian.
    const turnedField = () => [18 * Math.sin(1), 18 * Math.cos(1), -45];
    expect(weave(fusion, sweep, 30, turnedField)).toBeLessThan(2);
    expect(fusion.trust[0]).toBe(TRUST.HEADING_UNAIDED);
  });

  it("leaves out clipped magnetometer readings", () => {
    const { fusion, sweep } = settled();
    sweep.conditions[0] = CONDITION.MAG_CLIPPED;
    expect(weave(fusion, sweep, 10, disturbed)).toBeLessThan(2);
    expect(fusion.trust[0]).toBe(TRUST.HEADING_UNAIDED);
  });

  it("counts as unaided when the magnetometer falls silent", () => {
    const { fusion, sweep } = settled();
    sweep.present[0] = HAS_INERTIAL;
    weave(fusion, sweep, 2, undisturbed);
    expect(fusion.trust[0]).toBe(TRUST.HEADING_UNAIDED);
  });
});

describe("free heading", () => {
  it("ignores the magnetometer and says that the heading is unaided", () => {
    const run = (field: Vector) => {
      const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "free" });
      weave(fusion, oneSensor(), 20, () => field);
      expect(fusion.trust[0]).toBe(TRUST.HEADING_UNAIDED);
      return [...fusion.orientations];
    };
    expect(run([40, 20, -50])).toEqual(run(EARTH_FIELD));
  });

  it("starts every nose axis at east, so that a straight chain starts straight, whatever its roll", () => {
    const fusion = new ChainFusion({ sensorCount: 3, rateHz: RATE_HZ, heading: "free" });
    const sweep = createSweep(3);
    sweep.present.fill(HAS_INERTIAL);
    const attitudes = [
      turned([0, 0, 0]),
      turned([0.7, 0, 0]),
      product(turned([0, -0.4, 0]), turned([-1.2, 0, 0])),
    ];
    attitudes.forEach((attitude, sensor) => {
      fillRow(sweep, sensor, product(turned([0, 0, 1.3]), attitude), [0, 0, 0]);
    });
    advance(fusion, sweep);
    attitudes.forEach((attitude, sensor) => {
      expect(totalError(fusion, attitude, sensor)).toBeLessThan(1e-6); // exact readings: rounding
    });
  });

  it("goes on from the yaw before when a sensor comes back after it was lost", () => {
    const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "free" });
    const sweep = oneSensor();
    rest(fusion, sweep, 1, [1, 0, 0, 0]);
    rest(fusion, sweep, 1, [1, 0, 0, 0], [0, 0, 0.9]);
    rest(fusion, sweep, 1, [1, 0, 0, 0]);
    const before = [...fusion.orientations];
    sweep.present[0] = 0;
    for (let i = 0; i < 2 * RATE_HZ; i++) advance(fusion, sweep);
    sweep.present[0] = HAS_INERTIAL;
    advance(fusion, sweep);
    expect(totalError(fusion, before)).toBeLessThan(1e-3); // the rest bias estimate may have taken a little of the turn
  });
});
