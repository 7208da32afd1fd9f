import { expect, test } from "vitest";
import { SampleRing } from "../../bridge/drive/sample-ring.ts";

/** An eighth of a second: a hole is longer, and eighths add up without rounding. */
const STEP_S = 0.125;

/** Samples numbered from 0: the number, and ten times it. */
function ringOf(samples: number, capacity = 8): SampleRing {
  const ring = new SampleRing(2, capacity);
  for (let i = 0; i < samples; i++) ring.push(STEP_S * i, Float64Array.of(i), Float64Array.of(10 * i));
  return ring;
}

test.each([0, 1, 7, 8, 9, 15, 16, 17, 100])("of %i samples the newest eight lie in one piece", (samples) => {
  const ring = ringOf(samples);
  const newest = Array.from({ length: Math.min(samples, 8) }, (_, i) => samples - Math.min(samples, 8) + i);
  expect(ring.count).toBe(newest.length);
  expect([...ring.timeS.subarray(ring.end - ring.count, ring.end)]).toEqual(newest.map((n) => STEP_S * n));
  expect([...ring.columns[1]!.subarray(ring.end - ring.count, ring.end)]).toEqual(newest.map((n) => 10 * n));
});

test("a time is found by its sample at or after it", () => {
  const ring = ringOf(20);
  const found = (sample: number) => ring.columns[0]![ring.indexAt(STEP_S * sample)];
  expect([found(3), found(12), found(14.2), found(19)]).toEqual([12, 12, 15, 19]);
  expect(ring.indexAt(STEP_S * 19.1)).toBe(ring.end);
});

/** The second column of samples 14 to 17, so many samples before. */
function lagged(ring: SampleRing, samples: number, stride = 1): number[] {
  const out = new Float64Array(Math.ceil(4 / stride));
  const [start, end] = [14, 18].map((sample) => ring.indexAt(STEP_S * sample));
  ring.laggedInto(out, 1, STEP_S * samples, start!, end!, stride);
  return [...out].map((value) => Math.round(value * 1e9) / 1e9);
}

test("a lagged column is that of before, NaN where nothing is held around", () => {
  const ring = ringOf(20);
  expect(lagged(ring, 0)).toEqual([140, 150, 160, 170]);
  // The ring begins at 12: the cubic needs a sample before and two behind.
  expect(lagged(ring, 2.5)).toEqual([Number.NaN, Number.NaN, 135, 145]);
  expect(lagged(ring, -1.5, 2)).toEqual([155, 175]);
  expect(lagged(ring, -3)).toEqual([170, 180, 190, Number.NaN]);
});

test("a hole is seen from before it, and nothing is interpolated across it", () => {
  const ring = ringOf(16);
  for (let i = 18; i < 22; i++) ring.push(STEP_S * i, Float64Array.of(i), Float64Array.of(10 * i));
  expect([ring.hasHole(ring.indexAt(STEP_S * 15)), ring.hasHole(ring.indexAt(STEP_S * 18))]).toEqual([
    true,
    false,
  ]);
  const out = new Float64Array(2);
  ring.laggedInto(out, 1, 1.5 * STEP_S, ring.indexAt(STEP_S * 18), ring.indexAt(STEP_S * 20));
  expect([...out]).toEqual([Number.NaN, Number.NaN]);
});
