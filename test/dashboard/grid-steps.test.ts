import fc from "fast-check";
import { expect, test } from "vitest";
import { CalmRange, gridStep, halfRange } from "../../dashboard/lanes/grid-steps.ts";

const lengths = fc.double({ min: 1e-4, max: 1e3, noNaN: true });

test("grid lines stand at 1, 2 or 5 times a power of ten, never closer than asked", () => {
  fc.assert(
    fc.property(lengths, (least) => {
      const step = gridStep(least);
      const digits = step / 10 ** Math.floor(Math.log10(step) + 1e-9);
      expect([1, 2, 5].some((d) => Math.abs(d - digits) < 1e-6)).toBe(true);
      // 2.5 is the widest ratio of neighbouring steps (2 to 5).
      expect(step / least).toBeGreaterThan(1 - 1e-6);
      expect(step / least).toBeLessThanOrEqual(2.5 + 1e-6);
    }),
  );
});

test("a range holds its peak with a little room, and not much more", () => {
  fc.assert(
    fc.property(lengths, (peak) => {
      expect(halfRange(peak) / peak).toBeGreaterThan(1.05);
      // 1.5 is the widest ratio of neighbouring ranges, on top of the margin of 6 %.
      expect(halfRange(peak) / peak).toBeLessThan(1.6);
    }),
  );
});

test("a range grows at once, and shrinks only after seconds of smaller peaks", () => {
  const range = new CalmRange();
  expect(range.update(0.03, 0)).toBe(true);
  expect(range.half).toBeCloseTo(0.04, 12);
  expect(range.update(0.055, 0.1)).toBe(true);
  expect(range.half).toBeCloseTo(0.06, 12);
  for (let t = 0.2; t < 6; t += 0.1) expect(range.update(0.03, t)).toBe(false);
  // The old peak is forgotten within two spans of looking back.
  for (let t = 6; t < 13; t += 0.1) range.update(0.03, t);
  expect(range.half).toBeCloseTo(0.04, 12);
});

test("a beat within the range never moves it", () => {
  const range = new CalmRange();
  let changes = 0;
  for (let t = 0; t < 60; t += 1 / 60) {
    if (range.update(0.001 + 0.05 * Math.abs(Math.sin(2 * Math.PI * t)), t) && t > 1) changes++;
  }
  expect(changes).toBe(0);
});
