/**
 * Allan deviation against W. J. Riley, "Handbook of Frequency Stability Analysis", NIST SP 1065 (2008): its
 * test set of 1000 numbers and their deviations at three averaging factors, seven digits.
 */
import { expect, test } from "vitest";
import { AllanMeter } from "../../bridge/numeric/allan.ts";

const FACTORS = [1, 10, 100] as const;

/** n[i + 1] = 16807 n[i] mod 2147483647 from 1234567890, as a share of 2147483647. */
function testSet(): number[] {
  let n = 1_234_567_890;
  return Array.from({ length: 1000 }, () => {
    const value = n / 2_147_483_647;
    n = (16_807 * n) % 2_147_483_647;
    return value;
  });
}

/** By the definition: half the mean squared difference of successive averages. */
function plain(values: readonly number[], m: number): number {
  const averages = Array.from(
    { length: Math.floor(values.length / m) },
    (_, i) => values.slice(i * m, (i + 1) * m).reduce((a, b) => a + b, 0) / m,
  );
  const squares = averages.slice(1).map((average, i) => (average - averages[i]!) ** 2);
  return Math.sqrt(squares.reduce((a, b) => a + b, 0) / (2 * squares.length));
}

test.each([
  [1, 0.2922319],
  [10, 0.09965736],
  [100, 0.03897804],
])("the numbers are those of the handbook: plain deviation at %i", (m, published) => {
  expect(plain(testSet(), m)).toBeCloseTo(published, 7); // as many digits as published
});

test("the overlapping deviation is the handbook's at every factor", () => {
  const meter = new AllanMeter(1, FACTORS);
  for (const value of testSet()) meter.add(0, value);
  [0.2922319, 0.09159953, 0.03241343].forEach((published, f) => {
    expect(meter.deviation(0, f)).toBeCloseTo(published, 7);
  });
});
