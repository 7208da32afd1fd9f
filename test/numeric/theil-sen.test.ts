import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { theilSen } from "../../bridge/numeric/theil-sen.ts";

describe("theilSen", () => {
  it("finds a straight line exactly, in any order of its points", () => {
    const line = theilSen([4, 0, 3, 1, 2], [13, 1, 10, 4, 7])!;
    expect([line.slope, line.start]).toEqual([3, 1]);
  });

  it("is not moved by one point in five that is far off", () => {
    const line = theilSen([0, 1, 2, 3, 4, 5], [0, 1, 2, 300, 4, 5])!;
    expect([line.slope, line.start]).toEqual([1, 0]);
  });

  it("says nothing of points at one time", () => {
    expect(theilSen([2, 2, 2], [1, 5, 9])).toBeNull();
    expect(theilSen([], [])).toBeNull();
  });

  it("excludes no slope with four points, and zero with five that only rise", () => {
    expect(theilSen([0, 1, 2, 3], [0, 1, 2, 3])).toMatchObject({ low: -Infinity, high: Infinity });
    expect(theilSen([0, 1, 2, 3, 4], [0, 1, 4, 9, 16])!.low).toBe(1);
    expect(theilSen([0, 1, 2, 3, 4], [0, 1, 4, 3, 16])!.low).toBeLessThan(0);
  });

  it.each([5, 6, 7])("takes at most one order in twenty of %i values without trend for a trend", (count) => {
    const orders = permutations([...Array(count).keys()]);
    const times = [...Array(count).keys()];
    const told = orders.filter((values) => {
      const { low, high } = theilSen(times, values)!;
      return low > 0 || high < 0;
    });
    expect(told.length).toBeGreaterThan(0);
    expect(told.length / orders.length).toBeLessThanOrEqual(0.05);
  });

  it("holds its slope within its interval, and turns with its values", () => {
    const values = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 5, maxLength: 12 });
    fc.assert(
      fc.property(values, (points) => {
        const times = points.map((_, i) => i);
        const line = theilSen(times, points)!;
        expect(line.low).toBeLessThanOrEqual(line.slope);
        expect(line.high).toBeGreaterThanOrEqual(line.slope);
        const turned = theilSen(
          times,
          points.map((value) => -value),
        )!;
        expect(turned.slope).toBeCloseTo(-line.slope, 9);
        expect(turned.low).toBeCloseTo(-line.high, 9);
      }),
    );
  });
});

function permutations(items: readonly number[]): number[][] {
  if (items.length === 0) return [[]];
  return items.flatMap((item, i) =>
    permutations([...items.slice(0, i), ...items.slice(i + 1)]).map((rest) => [item, ...rest]),
  );
}
