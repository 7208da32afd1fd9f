import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { TRUST } from "../../bridge/sweep.ts";
import {
  advance,
  fillRow,
  headingError,
  inclinationError,
  oneSensor,
  type Quaternion,
  RATE_HZ,
  rest,
  totalError,
  turned,
} from "./motion.ts";

const magnetic = () => new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic" });

const orientation = fc
  .tuple(
    fc.double({ min: -1, max: 1, noNaN: true }),
    fc.double({ min: -1, max: 1, noNaN: true }),
    fc.double({ min: -1, max: 1, noNaN: true }),
    fc.double({ min: -1, max: 1, noNaN: true }),
  )
  .filter((q) => Math.hypot(...q) > 0.1)
  .map((q): Quaternion => q.map((c) => c / Math.hypot(...q)));

describe("a body at rest", () => {
  it("reads its true orientation from the first reading, at any tilt and heading", () => {
    fc.assert(
      fc.property(orientation, (truth) => {
        const fusion = magnetic();
        const sweep = oneSensor();
        rest(fusion, sweep, 0.01, truth);
        // Exact readings: what remains is rounding, worst near upside down where the square root of it enters.
        expect(totalError(fusion, truth)).toBeLessThan(1e-5);
      }),
    );
  });

  it("reads its true inclination within 0.5 degrees under sensor noise", () => {
    fc.assert(
      fc.property(orientation, fc.integer({ min: 1, max: 1e9 }), (truth, seed) => {
        const fusion = magnetic();
        const sweep = oneSensor();
        const noise = generator(seed);
        fillRow(sweep, 0, truth, [0, 0, 0]);
        const clean = sweep.values.slice();
        for (let i = 0; i < 5 * RATE_HZ; i++) {
          for (let c = 0; c < 9; c++)
            sweep.values[c] = clean[c]! + [0.003, 0.05, 0.5][Math.floor(c / 3)]! * noise();
          advance(fusion, sweep);
        }
        expect(inclinationError(fusion, truth) * DEG_PER_RAD).toBeLessThan(0.5);
      }),
      { numRuns: 20 },
    );
  });

  it("stays exactly upright and exactly upside down", () => {
    for (const truth of [
      [1, 0, 0, 0],
      [0, 1, 0, 0],
      [0, 0, 1, 0],
    ]) {
      const fusion = magnetic();
      rest(fusion, oneSensor(), 5, truth);
      expect(totalError(fusion, truth)).toBeLessThan(1e-9); // rounding
    }
  });

  it("settles in magnetic time constants, and says so until then", () => {
    const fusion = magnetic();
    const sweep = oneSensor();
    rest(fusion, sweep, 1, [1, 0, 0, 0]);
    expect(fusion.trust[0]).toBe(TRUST.SETTLING);
    rest(fusion, sweep, 10, [1, 0, 0, 0]);
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
  });
});

describe("gyroscope bias", () => {
  it("is found at rest, after which the orientation stands still without a field", () => {
    const truth = turned([0.2, -0.4, 0.3]);
    const bias = [0.4, -0.6, 0.5].map((degPerS) => degPerS * RAD_PER_DEG);
    const fusion = magnetic();
    const sweep = oneSensor();
    rest(fusion, sweep, 20, truth, bias);
    const before = headingError(fusion, truth);
    sweep.present[0] = 3; // no magnetometer from here on
    rest(fusion, sweep, 60, truth, bias);
    // 0.5 °/s would be 30° in a minute; the published steady deviation of the bias at rest, 0.03 °/s, would be 1.8°.
    expect(Math.abs(headingError(fusion, truth) - before) * DEG_PER_RAD).toBeLessThan(1.8);
    expect(inclinationError(fusion, truth) * DEG_PER_RAD).toBeLessThan(0.1);
  });

  it("is found in motion from the inclination, about the axes that come to lie level", () => {
    const errorAfterTwoMinutes = (parameters: { biasSigmaStart?: number }) => {
      const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic", parameters });
      const sweep = oneSensor();
      for (let i = 1; i <= 120 * RATE_HZ; i++) {
        // Turning about a level axis at 1 rad/s: rest is out of the question.
        // Rate and specific force are means over the interval: those of its middle.
        fillRow(sweep, 0, turned([(i - 0.5) / RATE_HZ, 0, 0]), [1 + 0.5 * RAD_PER_DEG, 0, 0]);
        advance(fusion, sweep);
      }
      return inclinationError(fusion, turned([120, 0, 0])) * DEG_PER_RAD;
    };
    // A bias of 0.5 °/s that is not estimated lets the inclination lag by its time constant: 0.5 °/s x 3 s.
    expect(errorAfterTwoMinutes({ biasSigmaStart: 1e-9 })).toBeGreaterThan(1.4);
    // The published steady deviation in motion, 0.1 °/s, would be 0.3°.
    expect(errorAfterTwoMinutes({})).toBeLessThan(0.3);
  });

  it("is never believed beyond its limit", () => {
    const fusion = magnetic();
    const sweep = oneSensor();
    sweep.present[0] = 3;
    // An even turn of 10 °/s about the vertical is motion, not bias: it must be followed.
    for (let i = 0; i < 30 * RATE_HZ; i++) {
      fillRow(sweep, 0, [1, 0, 0, 0], [0, 0, 10 * RAD_PER_DEG]);
      advance(fusion, sweep);
    }
    const turnedBy = (29.99 * 10 * RAD_PER_DEG) % (2 * Math.PI);
    expect(totalError(fusion, turned([0, 0, turnedBy])) * DEG_PER_RAD).toBeLessThan(0.1);
  });
});

/** Noise of deviation 0.58, from a Park-Miller generator. */
function generator(seed: number): () => number {
  let n = seed;
  const uniform = () => {
    n = (16807 * n) % 2147483647;
    return n / 2147483647;
  };
  return () => uniform() + uniform() + uniform() + uniform() - 2;
}
