import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  conjugate,
  fromRotationVector,
  keepUnit,
  multiply,
  normalise,
  rotate,
  slerp,
  toMatrix,
  toRotationVector,
  turnBetween,
  turnBy,
} from "../../bridge/numeric/quaternion.ts";

const HALF = Math.SQRT1_2;
/** Some dozens of double-precision operations on numbers near 1. */
const ROUNDING = 1e-14;

const component = fc.double({ min: -1, max: 1, noNaN: true });
const vector = fc.tuple(component, component, component).filter((v) => Math.hypot(...v) > 1e-3);
const unit = fc
  .tuple(component, component, component, component)
  .filter((q) => Math.hypot(...q) > 1e-3)
  .map((q) => q.map((c) => c / Math.hypot(...q)));

function close(actual: ArrayLike<number>, expected: readonly number[], tolerance = ROUNDING): void {
  expected.forEach((value, i) => {
    expect(Math.abs(actual[i]! - value), `slot ${i}`).toBeLessThanOrEqual(tolerance);
  });
}

describe("product and rotation", () => {
  it("follows Hamilton: i j = k", () => {
    const out = new Float64Array(4);
    multiply(out, [0, 1, 0, 0], [0, 0, 1, 0]);
    expect([...out]).toEqual([0, 0, 0, 1]);
  });

  it("turns x to y by a quarter turn about z", () => {
    const out = new Float64Array(3);
    rotate(out, [HALF, 0, 0, HALF], [1, 0, 0]);
    close(out, [0, 1, 0]);
  });

  it("works at offsets and in place", () => {
    const q = Float64Array.of(9, HALF, 0, 0, HALF, 9, HALF, HALF, 0, 0);
    const expected = new Float64Array(4);
    multiply(expected, [HALF, 0, 0, HALF], [HALF, HALF, 0, 0]);
    multiply(q, q, q, 1, 1, 6);
    expect([...q]).toEqual([9, ...expected, 9, HALF, HALF, 0, 0]);
    const v = Float64Array.of(9, 1, 0, 0);
    rotate(v, [HALF, 0, 0, HALF], v, 1, 0, 1);
    close(v, [9, 0, 1, 0]);
  });

  it("rotates by a product as by its factors in turn, and back by the conjugate", () => {
    fc.assert(
      fc.property(unit, unit, vector, (a, b, v) => {
        const ab = [0, 0, 0, 0];
        const once = [0, 0, 0];
        const twice = [0, 0, 0];
        multiply(ab, a, b);
        rotate(once, ab, v);
        rotate(twice, b, v);
        rotate(twice, a, twice);
        close(once, twice);
        conjugate(ab, ab);
        rotate(once, ab, once);
        close(once, v);
      }),
    );
  });
});

describe("normalise", () => {
  it("keeps the direction and gives unit length", () => {
    const out = new Float64Array(4);
    normalise(out, [2, 0, 0, -2]);
    close(out, [HALF, 0, 0, -HALF]);
  });

  it.each([
    ["zero", [0, 0, 0, 0]],
    ["not-a-number", [1, Number.NaN, 0, 0]],
    ["infinite", [1, Infinity, 0, 0]],
  ])("gives the identity for a %s quaternion", (_, q) => {
    const out = new Float64Array(4);
    normalise(out, q);
    expect([...out]).toEqual([1, 0, 0, 0]);
  });
});

describe("keepUnit", () => {
  it("squares a small error of length", () => {
    const out = [0, 0, 0, 0];
    keepUnit(out, [HALF * (1 + 1e-7), 0, HALF * (1 + 1e-7), 0]);
    close(out, [HALF, 0, HALF, 0], 2e-14);
  });
});

describe("turnBy", () => {
  it("is the product with the exponential", () => {
    fc.assert(
      fc.property(unit, vector, fc.double({ min: 0.001, max: 5, noNaN: true }), (q, direction, angle) => {
        const v = direction.map((c) => (c / Math.hypot(...direction)) * angle);
        const expected = [0, 0, 0, 0];
        const out = [0, 0, 0, 0];
        fromRotationVector(expected, v);
        multiply(expected, q, expected);
        turnBy(out, q, v);
        close(out, expected);
      }),
    );
  });

  it("holds the unit length over many turns", () => {
    const q = Float64Array.of(1, 0, 0, 0);
    for (let i = 0; i < 100_000; i++) turnBy(q, q, [0.01, -0.02, 0.03]);
    expect(Math.abs(Math.hypot(...q) - 1)).toBeLessThan(1e-14); // rounding of the last turn, not of all
  });
});

describe("toMatrix", () => {
  it("rotates as the quaternion does", () => {
    fc.assert(
      fc.property(unit, vector, (q, v) => {
        const m = new Float64Array(9);
        const rotated = [0, 0, 0];
        toMatrix(m, q);
        rotate(rotated, q, v);
        close(
          [0, 3, 6].map((row) => m[row]! * v[0] + m[row + 1]! * v[1] + m[row + 2]! * v[2]),
          rotated,
        );
      }),
    );
  });
});

describe("exponential and logarithm", () => {
  it("undo each other for turns below half a turn", () => {
    fc.assert(
      fc.property(vector, fc.double({ min: 1e-12, max: 3.1, noNaN: true }), (direction, angle) => {
        const v = direction.map((c) => (c / Math.hypot(...direction)) * angle);
        const q = [0, 0, 0, 0];
        const back = [0, 0, 0];
        fromRotationVector(q, v);
        expect(Math.abs(Math.hypot(...q) - 1)).toBeLessThanOrEqual(ROUNDING);
        toRotationVector(back, q);
        close(back, v);
      }),
    );
  });

  it("takes the shorter way round for a quaternion of negative scalar part", () => {
    const out = [0, 0, 0];
    toRotationVector(out, [-HALF, 0, 0, -HALF]);
    close(out, [0, 0, Math.PI / 2]);
  });
});

describe("slerp", () => {
  it("meets both ends, and takes the shorter way when the ends differ in sign", () => {
    const out = [0, 0, 0, 0];
    const a = [1, 0, 0, 0];
    const b = [-HALF, 0, 0, -HALF];
    slerp(out, a, b, 0);
    close(out, a);
    slerp(out, a, b, 0.5);
    close(out, [Math.cos(Math.PI / 8), 0, 0, Math.sin(Math.PI / 8)]);
  });

  it("turns at an even rate about one axis", () => {
    fc.assert(
      fc.property(unit, vector, fc.double({ min: 0, max: 1, noNaN: true }), (a, direction, share) => {
        const b = [0, 0, 0, 0];
        const expected = [0, 0, 0, 0];
        const out = [0, 0, 0, 0];
        fromRotationVector(b, direction);
        multiply(b, a, b);
        fromRotationVector(
          expected,
          direction.map((c) => c * share),
        );
        multiply(expected, a, expected);
        slerp(out, a, b, share);
        close(out, expected);
      }),
    );
  });
});

describe("turnBetween", () => {
  it("is the rotation vector of the inverse of one times the other, whatever the sign of either", () => {
    fc.assert(
      fc.property(unit, unit, (a, b) => {
        const q = [0, 0, 0, 0];
        const expected = [0, 0, 0];
        conjugate(q, a);
        multiply(q, q, b);
        toRotationVector(expected, q);
        // Half a turn may go either way round.
        fc.pre(Math.abs(q[0]!) > 1e-6);
        const out = new Float64Array(3);
        turnBetween(out, Float64Array.from(a), Float64Array.from(b));
        close(out, expected, 1e-13);
      }),
    );
  });
});
