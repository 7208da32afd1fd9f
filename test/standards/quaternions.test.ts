/** Quaternion algebra and slerp against SciPy (scipy.spatial.transform, table and script in tables/quaternions.*). */
import { describe, expect, it } from "vitest";
import {
  conjugate,
  fromRotationVector,
  multiply,
  rotate,
  slerp,
  toRotationVector,
} from "../../bridge/numeric/quaternion.ts";
import table from "./tables/quaternions.json" with { type: "json" };

/** Both sides round at 2e-16 an operation; a dozen operations on numbers near 1. */
const ROUNDING = 2e-15;

/** q and -q are one rotation. */
function expectSameRotation(actual: Float64Array, expected: readonly number[], tolerance = ROUNDING): void {
  const dot = expected.reduce((sum, value, i) => sum + value * actual[i]!, 0);
  const sign = dot < 0 ? -1 : 1;
  expectClose(
    actual,
    expected.map((value) => sign * value),
    tolerance,
  );
}

function expectClose(actual: Float64Array, expected: readonly number[], tolerance: number): void {
  for (let i = 0; i < expected.length; i++) {
    expect(Math.abs(actual[i]! - expected[i]!), `slot ${i}`).toBeLessThanOrEqual(tolerance);
  }
}

describe("quaternions against SciPy", () => {
  const q = new Float64Array(4);
  const v = new Float64Array(3);

  it("multiplies, inverts and rotates alike", () => {
    for (const row of table.pairs) {
      multiply(q, row.a, row.b);
      expectSameRotation(q, row.product);
      conjugate(q, row.a);
      expectSameRotation(q, row.inverse);
      rotate(v, row.a, row.vector);
      expectClose(v, row.rotated, 50 * ROUNDING); // vectors of length up to 30
    }
  });

  it("rotates as SciPy's matrix of the same quaternion does", () => {
    for (const row of table.pairs) {
      const m = row.matrix;
      const [x, y, z] = row.vector as [number, number, number];
      rotate(v, row.a, row.vector);
      const byMatrix = [0, 3, 6].map((at) => m[at]! * x + m[at + 1]! * y + m[at + 2]! * z);
      expectClose(v, byMatrix, 50 * ROUNDING);
    }
  });

  it("takes exponentials alike from zero to beyond half a turn, on both sides of the series' border", () => {
    for (const row of table.exponentials) {
      fromRotationVector(q, row.vector);
      expectSameRotation(q, row.quaternion);
    }
  });

  it("takes logarithms alike", () => {
    for (const row of table.pairs) {
      toRotationVector(v, row.a);
      expectClose(v, row.logA, 1e-14); // the arc tangent's slope near half a turn costs one digit
    }
  });

  it("interpolates on the sphere alike", () => {
    for (const row of table.slerps) {
      row.shares.forEach((share, i) => {
        slerp(q, row.a, row.b, share);
        expectSameRotation(q, row.between[i]!, 5e-15); // SciPy goes by rotation vectors, a longer chain of rounding
      });
    }
  });
});
