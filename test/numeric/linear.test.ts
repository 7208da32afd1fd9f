import fc from "fast-check";
import { expect, test } from "vitest";
import { solve } from "../../bridge/numeric/linear.ts";

test("what was multiplied is found again, in any order of rows", () => {
  const number = fc.double({ min: -9, max: 9, noNaN: true });
  const row = fc.array(number, { minLength: 4, maxLength: 4 });
  fc.assert(
    fc.property(fc.array(row, { minLength: 4, maxLength: 4 }), row, fc.nat(3), (rows, x, shift) => {
      // Dominant diagonal: regular. Rows turned round, so that pivots must be looked for.
      const regular = rows.map((values, i) => values.map((value, k) => (i === k ? value + 40 : value)));
      const turned = regular.map((_, i) => regular[(i + shift) % 4]!);
      const b = Float64Array.from(turned, (values) =>
        values.reduce((sum, value, k) => sum + value * x[k]!, 0),
      );
      expect(solve(Float64Array.from(turned.flat()), b, 4)).toBe(true);
      // Rounding, with a condition below 10.
      x.forEach((value, k) => {
        expect(Math.abs(b[k]! - value)).toBeLessThan(1e-11);
      });
    }),
  );
});

test("a singular system and a not-a-number are said to have no solution", () => {
  expect(solve(Float64Array.of(1, 2, 2, 4), Float64Array.of(1, 2), 2)).toBe(false);
  expect(solve(Float64Array.of(Number.NaN, 2, 2, 4), Float64Array.of(1, 2), 2)).toBe(false);
});
