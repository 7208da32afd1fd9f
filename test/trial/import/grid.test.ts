import { describe, expect, test } from "vitest";
import { findGrid, sequenceStep } from "../../../bridge/trial/import/grid.ts";

const every = (count: number, intervalUs: number) =>
  Array.from({ length: count }, (_, i) => Math.round(i * intervalUs));

describe("the grid of row times", () => {
  test("an interval of a fraction of a µs is found across rounded times", () => {
    const { intervalUs, regular } = findGrid([every(301, 1e6 / 300)], 10_000);
    // The mean step: the last of 301 times is rounded by at most half a µs over 300 steps.
    expect(Math.abs(intervalUs - 1e6 / 300)).toBeLessThan(0.5 / 300 + 1e-9);
    expect(regular).toBe(true);
  });

  test("missing rows leave a grid regular and its interval unchanged", () => {
    const times = every(200, 10_000).filter((_, i) => i % 10 !== 3 && !(i > 90 && i < 120));
    expect(findGrid([times], 5000)).toEqual({ intervalUs: 10_000, regular: true });
  });

  test("times that jitter by a sixth of an interval in one row of seven are irregular", () => {
    const times = every(200, 6000).map((time, i) => (i % 7 === 0 ? time + 1000 : time));
    expect(findGrid([times], 5000).regular).toBe(false);
  });

  test("several tables are judged by their own steps, not by the offset between them", () => {
    const times = every(50, 10_000);
    const grid = findGrid([times, times.map((time) => time + 3000)], 5000);
    expect(grid).toEqual({ intervalUs: 10_000, regular: true });
  });

  test("the nominal interval is assumed where there is one row only", () => {
    expect(findGrid([[42]], 5000)).toEqual({ intervalUs: 5000, regular: true });
  });
});

describe("steps of the sequence", () => {
  const grid = { intervalUs: 10_000, regular: true };

  test.each([
    [10_000, 1],
    [14_999, 1],
    [15_000, 2],
    [30_100, 3],
    [2000, 1],
  ])("a step of %d µs on a regular grid of 10 000 counts %d", (stepUs, count) => {
    expect(sequenceStep(stepUs, grid)).toBe(count);
  });

  test("every step counts one in irregular data", () => {
    expect(sequenceStep(95_000, { intervalUs: 10_000, regular: false })).toBe(1);
  });
});
