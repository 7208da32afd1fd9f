import fc from "fast-check";
import { expect, test } from "vitest";
import type { GaitName } from "../../bridge/numeric/gaits.ts";
import { ErrorModel } from "../../bridge/placement/expected-error.ts";
import {
  bestPlacement,
  type Cost,
  evenPlacement,
  type MountableRange,
  mostSensors,
} from "../../bridge/placement/search.ts";
import { RANGE, swimmerWith } from "./models.ts";

/** Every sensor wants to sit at a place of its own. */
const pulledTo =
  (wanted: readonly number[]): Cost =>
  (stations) =>
    1e-3 + stations.reduce((sum, station, i) => sum + (station - wanted[i]) ** 2, 0);

test("finds places that are known, and gives way where sensors would be too close or cannot sit", () => {
  const free = bestPlacement(3, RANGE, pulledTo([0.2, 0.31, 0.8]));
  // To the search's tolerance of 0.003.
  [0.2, 0.31, 0.8].forEach((wanted, i) => {
    expect(Math.abs(free[i] - wanted)).toBeLessThan(0.003);
  });
  const held = bestPlacement(3, RANGE, pulledTo([0, 0.5, 0.5]));
  expect(held[0]).toBeLessThan(RANGE.from + 0.003);
  expect(held[2] - held[1]).toBeLessThan(RANGE.spacing + 0.006);
});

test("whatever the cost and range, places ascend, keep their distance, stay in range, and cost no more than even ones", () => {
  const range = fc
    .record({
      from: fc.double({ min: 0, max: 0.4, noNaN: true }),
      span: fc.double({ min: 0.1, max: 0.6, noNaN: true }),
      gaps: fc.double({ min: 1, max: 12, noNaN: true }),
    })
    .map(({ from, span, gaps }): MountableRange => ({ from, to: from + span, spacing: span / gaps }));
  const wanted = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 13, maxLength: 13 });
  fc.assert(
    fc.property(range, wanted, fc.nat(12), (range, wanted, nth) => {
      const count = 1 + (nth % mostSensors(range));
      const cost = pulledTo(wanted);
      const stations = bestPlacement(count, range, cost);
      expect(stations).toHaveLength(count);
      const rounding = 1e-8;
      expect(stations[0]).toBeGreaterThanOrEqual(range.from - rounding);
      expect(stations.at(-1)).toBeLessThanOrEqual(range.to + rounding);
      for (let i = 1; i < count; i++) {
        expect(stations[i] - stations[i - 1]).toBeGreaterThanOrEqual(range.spacing - rounding);
      }
      expect(cost(stations)).toBeLessThanOrEqual(cost(evenPlacement(count, range)));
    }),
    { seed: 1, numRuns: 200 },
  );
});

test.each<[GaitName, number]>([
  ["carangiform", 2],
  ["anguilliform", 2],
  ["carangiform", 3],
  ["anguilliform", 3],
])("for a %s body, %d sensors are placed as well as trying every 4 % can", (gait, count) => {
  const model = new ErrorModel({ ...swimmerWith(gait), moments: 5, noiseMoments: 1, learnedBeats: 0 });
  const cost: Cost = (stations) => model.expect(stations).total;
  let least = Infinity;
  const tryAll = (before: number[]) => {
    if (before.length === count) {
      least = Math.min(least, cost(before));
      return;
    }
    const from = before.length === 0 ? RANGE.from : before.at(-1)! + 0.04;
    for (let station = from; station <= RANGE.to; station += 0.04) tryAll([...before, station]);
  };
  tryAll([]);
  expect(cost(bestPlacement(count, RANGE, cost))).toBeLessThanOrEqual(least);
});

test("a known placement that is better than what is found is kept", () => {
  // A well so narrow that the search cannot see it.
  const cost: Cost = ([station]) => (Math.abs(station - 0.4321) < 1e-5 ? 0 : 1);
  expect(bestPlacement(1, RANGE, cost, [0.4321])).toEqual([0.4321]);
  expect(bestPlacement(1, RANGE, cost, [0.01])[0]).toBeGreaterThanOrEqual(RANGE.from);
});

test("as many fit as the range holds, its ends included", () => {
  expect(mostSensors({ from: 0.05, to: 0.95, spacing: 0.03 })).toBe(31);
  expect(mostSensors({ from: 0.1, to: 0.2, spacing: 0.2 })).toBe(1);
});
