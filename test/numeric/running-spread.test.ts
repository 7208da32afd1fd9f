import { expect, test } from "vitest";
import { RunningSpread } from "../../bridge/numeric/running-spread.ts";

const VALUES = [1e9 + 4, 1e9 + 7, 1e9 + 13, 1e9 + 16, 1e9 + 1];

function spreadOf(values: readonly number[]): RunningSpread {
  const spread = new RunningSpread();
  for (const value of values) spread.add(value);
  return spread;
}

test("mean and deviation hold on numbers far from zero", () => {
  const { count, mean, deviation } = spreadOf(VALUES);
  expect(count).toBe(5);
  expect(mean).toBe(1e9 + 8.2);
  // Squares about 8.2: 17.64 + 1.44 + 23.04 + 60.84 + 51.84, over four.
  expect(deviation).toBeCloseTo(Math.sqrt(154.8 / 4), 6);
});

test("two joined are one that has taken in both", () => {
  for (const cut of [0, 1, 3, 5]) {
    const joined = spreadOf(VALUES.slice(0, cut));
    joined.merge(spreadOf(VALUES.slice(cut)));
    const whole = spreadOf(VALUES);
    expect(joined.count).toBe(5);
    expect(joined.mean).toBeCloseTo(whole.mean, 6);
    expect(joined.deviation).toBeCloseTo(whole.deviation, 6);
  }
});

test("nothing has no mean, one number no deviation, and not-a-number is passed over", () => {
  expect(spreadOf([]).mean).toBeNaN();
  const one = spreadOf([Number.NaN, 3]);
  expect(one.count).toBe(1);
  expect(one.mean).toBe(3);
  expect(one.deviation).toBeNaN();
  expect(spreadOf([-2, -4]).variation).toBeCloseTo(Math.SQRT2 / 3, 12);
});
