import { expect, test } from "vitest";
import { leastCount, planPlacement } from "../../bridge/placement/plan.ts";
import { RANGE, swimmerWith } from "./models.ts";

const present = [0.06, 0.24, 0.41, 0.58, 0.75, 0.92];
const plan = planPlacement({ ...swimmerWith("carangiform"), range: RANGE, present, count: 6 });
const best = plan.byCount.map((row) => row.best.error.total);

test("compares one sensor to sixteen, and the number that was asked for is among them", () => {
  expect(plan.byCount.map(({ count }) => count)).toEqual(Array.from({ length: 16 }, (_, i) => i + 1));
  expect(plan.chosen).toBe(plan.byCount[5]);
  expect(plan.present.stations).toEqual(present);
});

test("the best places are never worse than even ones or the rig's own, and more sensors are never worse", () => {
  // The search compares by fewer moments and places are rounded to a thousandth: half a percent.
  for (const row of plan.byCount) {
    expect(row.best.error.total).toBeLessThan(1.005 * row.even.error.total);
  }
  expect(plan.chosen.best.error.total).toBeLessThan(1.005 * plan.present.error.total);
  for (let i = 1; i < best.length; i++) expect(best[i]).toBeLessThan(1.005 * best[i - 1]);
});

test("the places matter: four sensors at the best ones come within 60 % of the even ones' error", () => {
  const { even, best } = plan.byCount[3];
  expect(best.error.total).toBeLessThan(0.6 * even.error.total);
});

test("the least number for an error is the first whose error, as it is read, is within it", () => {
  const four = Math.round(1e4 * best[3]) / 1e4;
  expect(leastCount(plan, "best", four)).toBe(4);
  expect(leastCount(plan, "best", four - 1e-4)).toBe(5);
  expect(leastCount(plan, "even", four)).toBeGreaterThan(4);
  expect(leastCount(plan, "best", 1e-4)).toBeNull();
});

test("only as many are compared as fit, and more than sixteen on request", () => {
  const short = { from: 0.4, to: 0.6, spacing: 0.05 };
  const few = planPlacement({ ...swimmerWith("carangiform"), range: short, present, count: 2 });
  expect(few.byCount).toHaveLength(5);
  const close = { from: 0.05, to: 0.95, spacing: 0.2 };
  expect(planPlacement({ ...swimmerWith("carangiform"), range: close, present, count: 5 }).chosen.count).toBe(
    5,
  );
});
