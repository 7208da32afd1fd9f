import { expect, test } from "vitest";
import { AllanMeter } from "../../bridge/numeric/allan.ts";
import { Random } from "../../bridge/rehearsal/random.ts";

test("rows do not touch each other, and one that is reset starts anew", () => {
  const values = Array.from({ length: 50 }, (_, i) => Math.sin(i * i));
  const alone = new AllanMeter(1, [1, 3]);
  for (const value of values) alone.add(0, value);
  const meter = new AllanMeter(2, [1, 3]);
  for (const value of values) meter.add(0, value + 1000);
  meter.reset(0);
  for (const value of values) {
    meter.add(0, value);
    meter.add(1, -5 * value);
  }
  for (const f of [0, 1]) {
    expect(meter.deviation(0, f)).toBe(alone.deviation(0, f));
    expect(meter.deviation(1, f)).toBeCloseTo(5 * alone.deviation(0, f), 12);
  }
});

test("says nothing before there are two averages", () => {
  const meter = new AllanMeter(1, [1, 4]);
  for (let i = 0; i < 7; i++) meter.add(0, i);
  expect(meter.deviation(0, 0)).toBeCloseTo(Math.SQRT1_2, 12);
  expect(meter.deviation(0, 1)).toBeNaN();
});

test("white noise falls with the square root of the averaging time", () => {
  const random = Random.forStream(1, 1);
  const meter = new AllanMeter(1, [1, 16]);
  for (let i = 0; i < 20_000; i++) meter.add(0, 7 + 0.1 * random.normal());
  // 20 000 and some 2500 independent differences: 1 % and 2 %, three times that.
  expect(Math.abs(meter.deviation(0, 0) / 0.1 - 1)).toBeLessThan(0.03);
  expect(Math.abs(meter.deviation(0, 1) / 0.025 - 1)).toBeLessThan(0.06);
});
