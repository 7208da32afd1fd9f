import fc from "fast-check";
import { expect, test } from "vitest";
import { HISTORY_FRAMES, History } from "../../dashboard/stream/history.ts";

/** A midline of `points` points, all `lateral` metres to the left of the axis. */
function midline(points: number, lateral: number): Float32Array {
  const out = new Float32Array(points * 3);
  for (let point = 0; point < points; point++) out[3 * point + 1] = lateral;
  return out;
}

function filled(frames: number, points = 3): History {
  const history = new History(points);
  for (let i = 0; i < frames; i++) history.add(i / 64, midline(points, i));
  return history;
}

test("keeps the newest frames, each at its index, and forgets the oldest", () => {
  const history = filled(HISTORY_FRAMES + 100);
  expect(history.count).toBe(HISTORY_FRAMES + 100);
  expect(history.oldest).toBe(100);
  for (const index of [100, 101, HISTORY_FRAMES, HISTORY_FRAMES + 99]) {
    expect(history.timeS(index)).toBe(index / 64);
    expect(history.lateral(index, 2)).toBe(index);
  }
});

test("keeps a copy: the midline given may be written to afterwards", () => {
  const history = new History(2);
  const given = midline(2, 1);
  history.add(0, given);
  given.fill(9);
  expect(history.lateral(0, 0)).toBe(1);
});

test("finds the first frame at or after a time, as a search through all of them does", () => {
  fc.assert(
    fc.property(
      fc.integer({ min: 0, max: 2 * HISTORY_FRAMES }),
      fc.double({ min: -2, max: 20, noNaN: true }),
      (frames, timeS) => {
        const history = filled(frames, 1);
        let expected = history.oldest;
        while (expected < history.count && history.timeS(expected) < timeS) expected++;
        expect(history.firstAtOrAfter(timeS)).toBe(expected);
      },
    ),
  );
});

test("the envelope spans the extremes since a time, point by point, and no others", () => {
  const history = new History(2);
  const shapes = [
    [9, -9],
    [0.1, -0.3],
    [-0.2, 0.4],
    [0, 0],
  ];
  shapes.forEach(([a, b], i) => {
    history.add(i, Float32Array.of(0, a!, 0, -1, b!, 0));
  });
  const low = new Float32Array(2);
  const high = new Float32Array(2);
  expect(history.envelope(0.5, low, high)).toBe(true);
  expect([...low]).toEqual([...Float32Array.of(-0.2, -0.3)]);
  expect([...high]).toEqual([...Float32Array.of(0.1, 0.4)]);
});

test("there is no envelope where no frame is young enough, and what was drawn is left alone", () => {
  const history = filled(4);
  const low = Float32Array.of(1, 2, 3);
  expect(history.envelope(10, low, new Float32Array(3))).toBe(false);
  expect([...low]).toEqual([1, 2, 3]);
});
