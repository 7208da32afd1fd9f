import { expect, test } from "vitest";
import { FlagBook } from "../../bridge/health/flag-book.ts";
import { OnBoardDifference } from "../../bridge/health/on-board.ts";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { THRESHOLDS } from "../support/health-bench.ts";
import { SyntheticRig } from "../support/synthetic-sweeps.ts";

const KIND = "on-board fusion differs";

function bench() {
  const { model } = new SyntheticRig({});
  const sensors = [0.2, 0.8].map((station, i) => ({ name: `S${i + 1}`, station, model }));
  const book = new FlagBook(sensors);
  const detector = new OnBoardDifference({
    sensors,
    lengthM: 1,
    rateHz: 100,
    thresholds: THRESHOLDS,
    expectedField: null,
    gravityMPerS2: null,
    book,
  });
  let timeS = 0;
  const show = (seconds: number, tiltDeg: number, turnDeg: number) => {
    for (const endS = timeS + seconds; timeS < endS; timeS += 0.01)
      detector.observe(
        timeS,
        Float64Array.of(Number.NaN, tiltDeg * RAD_PER_DEG),
        Float64Array.of(Number.NaN, turnDeg * RAD_PER_DEG),
      );
  };
  return { book, show };
}

test("a sensor's own orientation that differs for five seconds is flagged, with what differs and by how much", () => {
  const { book, show } = bench();
  show(4.9, 12, 3);
  expect(book.open).toEqual([]);
  show(0.2, 12, 3);
  expect(book.open).toMatchObject([
    { kind: KIND, sensor: 1, severity: "caution", detail: "inclination up to 12° off" },
  ]);
  show(3.2, 1, 1);
  expect(book.open).toEqual([]);
});

test("a heading that differs is told as such", () => {
  const { book, show } = bench();
  show(5.1, 1, 25);
  expect(book.open[0]?.detail).toBe("heading up to 25° off");
});

test("differences below the threshold are none, nor is a short one", () => {
  const { book, show } = bench();
  show(20, 9, 9);
  show(4, 30, 30);
  show(20, 9, 9);
  expect(book.open).toEqual([]);
});
