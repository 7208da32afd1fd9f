import fc from "fast-check";
import { expect, test } from "vitest";
import { cubicWeights } from "../../bridge/numeric/cubic.ts";

const weights = new Float64Array(4);

test("a cubic is met exactly at any time, on uneven samples", () => {
  const cubic = (t: number) => 2 - 3 * t + 0.5 * t * t + 0.25 * t ** 3;
  const step = fc.double({ min: 0.2, max: 3, noNaN: true });
  fc.assert(
    fc.property(step, step, step, fc.double({ min: 0, max: 1, noNaN: true }), (a, b, c, share) => {
      const times = Float64Array.of(0, a, a + b, a + b + c);
      const time = share * times[3]!;
      cubicWeights(weights, time, times);
      const sum = times.reduce((total, t, i) => total + weights[i]! * cubic(t), 0);
      // Rounding of a few products of numbers below 300.
      expect(Math.abs(sum - cubic(time))).toBeLessThan(1e-9);
    }),
  );
});

test("at a sample it is that sample, from any place of the array", () => {
  cubicWeights(weights, 7, Float64Array.of(0, 4, 6, 7, 9), 1);
  expect([...weights].map((weight) => weight + 0)).toEqual([0, 0, 1, 0]);
});
