import { expect, test } from "vitest";
import { HealthBench } from "../support/health-bench.ts";

/** One figure every five seconds, as the meter gives them. */
function told(...ppm: (number | null)[]) {
  const bench = new HealthBench();
  for (const [k, value] of ppm.entries()) bench.health.clockDrift(5 * k, value);
  return bench;
}

test("drift beyond the threshold is told when it has stayed, with its direction", () => {
  const bench = told(null, 260, 255, 250, 251);
  expect(bench.flags).toMatchObject([
    { kind: "clock drift", sensor: -1, startS: 5, detail: "the hub's clock runs 251 ppm fast" },
  ]);
  expect(told(-300, -300, -300, -300).flags[0]!.detail).toBe("the hub's clock runs 300 ppm slow");
});

test("two good crystals, and an estimate that settles, are no drift", () => {
  expect(told(null, null, 90, -120, 199, 150).raised).toEqual([]);
  expect(told(null, 900, 400, 120, 60, 30).raised).toEqual([]);
});

test("ends once it is well below the threshold for a while", () => {
  expect(told(300, 300, 300, 300, 170, 170, 170, 170).openNow).toEqual(["clock drift@-1"]);
  expect(told(300, 300, 300, 300, 150, 150, 150, 150).openNow).toEqual([]);
});
