import fc from "fast-check";
import { expect, test } from "vitest";
import { placeNames } from "../../dashboard/lanes/name-places.ts";

const evenly = (n: number, width: number) =>
  Array.from({ length: n }, (_, i) => (i / Math.max(1, n - 1)) * width);

test("names that fit stand in one row", () => {
  expect(placeNames(evenly(6, 900), Array(6).fill(40), 8)).toEqual({
    rows: [0, 0, 0, 0, 0, 0],
    thinned: false,
  });
});

test("longer ones are staggered in two rows, then three", () => {
  expect(placeNames([0, 50, 100, 150], Array(4).fill(80), 8).rows).toEqual([0, 1, 0, 1]);
  expect(placeNames([0, 50, 100, 150], Array(4).fill(120), 8).rows).toEqual([0, 1, 2, 0]);
});

test("too many are thinned out evenly, and it is said so", () => {
  const { rows, thinned } = placeNames(evenly(64, 800), Array(64).fill(25), 8);
  expect(thinned).toBe(true);
  const kept = rows.flatMap((row, i) => (row === 0 ? [i] : []));
  const steps = kept.slice(1).map((at, i) => at - kept[i]!);
  expect(new Set(steps).size).toBe(1);
  expect(kept.length).toBeGreaterThan(12);
});

test("whatever the places and widths, no two names in a row come closer than the gap", () => {
  const names = fc.array(
    fc.record({
      at: fc.double({ min: 0, max: 1000, noNaN: true }),
      width: fc.double({ min: 1, max: 200, noNaN: true }),
    }),
    { maxLength: 80 },
  );
  fc.assert(
    fc.property(names, (unsorted) => {
      const sorted = [...unsorted].sort((a, b) => a.at - b.at);
      const { rows } = placeNames(
        sorted.map(({ at }) => at),
        sorted.map(({ width }) => width),
        8,
      );
      for (let i = 0; i < sorted.length; i++) {
        for (let j = i + 1; j < sorted.length; j++) {
          if (rows[i]! < 0 || rows[i] !== rows[j]) continue;
          const [a, b] = [sorted[i]!, sorted[j]!];
          // Rounding of sums of numbers near 1000.
          expect(b.at - b.width / 2 - (a.at + a.width / 2)).toBeGreaterThan(8 - 1e-9);
        }
      }
    }),
  );
});
