import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { RollingMax, RollingSum } from "../../bridge/health/windows.ts";

const SLICES = 5;
const SLICE_S = 0.2;

/** Steps of time, rows and whole amounts. */
const history = fc.array(
  fc.record({
    stepS: fc.oneof(fc.double({ min: 0, max: 0.3, noNaN: true }), fc.constant(5)),
    row: fc.nat({ max: 2 }),
    amount: fc.integer({ min: -9, max: 9 }),
  }),
  { maxLength: 80 },
);

/** The slice a time lies in, by the same rounding. */
const sliceOf = (timeS: number) => Math.floor((timeS + 1e-9) / SLICE_S);

describe("a rolling window", () => {
  it("sums and tops exactly what a list of all readings gives for the same slices", () => {
    fc.assert(
      fc.property(history, (steps) => {
        const sum = new RollingSum(3, SLICES * SLICE_S, SLICES);
        const max = new RollingMax(3, SLICES * SLICE_S, SLICES);
        const all: { slice: number; row: number; amount: number }[] = [];
        let timeS = 0;
        for (const { stepS, row, amount } of steps) {
          timeS += stepS;
          sum.advance(timeS);
          max.advance(timeS);
          sum.add(row, amount);
          max.put(row, amount);
          const now = sliceOf(timeS);
          all.push({ slice: now, row, amount });
          for (let r = 0; r < 3; r++) {
            const kept = all.filter((one) => one.row === r && one.slice > now - SLICES);
            const full = kept.filter((one) => one.slice < now);
            const total = (list: typeof kept) => list.reduce((s, one) => s + one.amount, 0);
            expect(sum.sum(r)).toBe(total(kept));
            expect(sum.sumOfFull(r)).toBe(total(full));
            expect(max.max(r)).toBe(Math.max(...kept.map((one) => one.amount)));
          }
        }
      }),
    );
  });

  it("spreads an amount over the time it belongs to and drops what is older than the window", () => {
    const sum = new RollingSum(1, 1, SLICES);
    sum.advance(10);
    sum.add(0, 100, 2);
    expect(sum.sum(0)).toBeCloseTo(50, 9);
    sum.advance(10.4);
    expect(sum.sum(0)).toBeCloseTo(30, 9);
    sum.advance(11);
    expect(sum.sum(0)).toBe(0);
  });
});
