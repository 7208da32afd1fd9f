import { expect, test } from "vitest";
import { PAST_CAPACITY, PastMidlines } from "../../dashboard/stream/past.ts";

const midline = (value: number) => Float32Array.of(0, value, -value, -1, 2 * value, -2 * value);

test("the ring gives back what was put in, oldest entries overwritten", () => {
  const past = new PastMidlines(2);
  for (let k = 0; k < 3 * PAST_CAPACITY + 5; k++) past.push(k / 60, midline(k));
  expect(past.size).toBe(PAST_CAPACITY);
  for (let entry = past.total - past.size; entry < past.total; entry++) {
    expect(past.timeS(entry)).toBe(entry / 60);
    expect(past.sideways(entry, 1)).toBe(2 * entry);
    expect(past.sideways(entry, 0)).toBe(entry);
  }
});

test("looking back finds the oldest entry not before a time", () => {
  const past = new PastMidlines(2);
  expect(past.firstSince(0)).toBe(0);
  for (let k = 0; k < 10; k++) past.push(k, midline(k));
  expect(past.firstSince(-1)).toBe(0);
  expect(past.firstSince(6.5)).toBe(7);
  expect(past.firstSince(7)).toBe(7);
  expect(past.firstSince(20)).toBe(10);
  past.clear();
  expect(past.newestS).toBeNaN();
  expect(past.firstSince(0)).toBe(0);
});

test("the ring keeps a copy: the midline given may be written to afterwards", () => {
  const past = new PastMidlines(2);
  const given = midline(1);
  past.push(0, given);
  given.fill(9);
  expect(past.sideways(0, 1)).toBe(2);
});
