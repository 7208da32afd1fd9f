/** The angle under a clipped crest, from its shoulders, against the closed form of a sinusoid. */
import { describe, expect, it } from "vitest";
import { arc, shoulderArc } from "../../bridge/fusion/clip-shoulders.ts";
import { DEFAULT_PARAMETERS } from "../../bridge/fusion/parameters.ts";
import { createRecord, Slot } from "../../bridge/fusion/record.ts";

const STEP_S = 0.01;
const LIMIT = 6;

/** A record after a stretch of rate(t), sampled at whole steps, that is clipped around t = 0; and its true excess. */
function clippedCrest(rate: (t: number) => number, after: number) {
  const r = createRecord(DEFAULT_PARAMETERS, STEP_S);
  let first = 0;
  while (rate((first - 1) * STEP_S) >= LIMIT) first--;
  let end = 0;
  while (rate(end * STEP_S) >= LIMIT) end++;
  r.set([rate((first - 1) * STEP_S), 0, 0, (first - 1) * STEP_S], Slot.CLIP_LAST);
  r.set([rate((first - 2) * STEP_S), 0, 0, (first - 2) * STEP_S], Slot.CLIP_LAST_BUT_ONE);
  r[Slot.CLIP_KNOWN] = 2;
  let excess = 0;
  for (let i = first; i < end + after; i++) {
    const read = Math.min(LIMIT, rate(i * STEP_S));
    r.set([read, 0, 0, STEP_S], Slot.CLIP_RATES + 4 * (i - first));
    if (i < end) excess += STEP_S * (rate(i * STEP_S) - LIMIT);
  }
  r[Slot.CLIP_COUNT] = end - first + after;
  r[Slot.CLIP_AFTER] = after;
  r[Slot.CLIP_SPAN] = (end - first) * STEP_S;
  return { r, excess };
}

const found = (r: Float64Array, periodS: number) => {
  shoulderArc(r, 0, 1, LIMIT, periodS);
  return arc[0]!;
};

describe("the angle under a clipped crest", () => {
  it.each([
    [7, 0, 4],
    [9, 0.3, 4],
    [12, -0.7, 3],
    [9, 0.5, 5],
  ])(
    "is exact for a sinusoid of %f rad/s about a mean of %f, %f beats a second, once the beat is known",
    (amplitude, mean, frequency) => {
      const omega = 2 * Math.PI * frequency;
      const { r, excess } = clippedCrest((t) => mean + amplitude * Math.cos(omega * (t - 0.002)), 3);
      // The middle is found by straight lines between readings: a few hundredths remain.
      expect(Math.abs(found(r, 1 / frequency) - excess)).toBeLessThan(0.03 * excess);
    },
  );

  it("is within a third without knowing the beat", () => {
    const { r, excess } = clippedCrest((t) => 9 * Math.cos(8 * Math.PI * t), 3);
    expect(Math.abs(found(r, 0) - excess)).toBeLessThan(0.33 * excess);
  });

  it("grows while the axis has not come back, ever more slowly", () => {
    const excesses = [0.02, 0.05, 0.08].map((spanS) => {
      const { r } = clippedCrest((t) => 9 * Math.cos(8 * Math.PI * t), 0);
      r[Slot.CLIP_SPAN] = spanS;
      return found(r, 0);
    });
    const [a, b, c] = excesses as [number, number, number];
    expect(a).toBeGreaterThan(0);
    expect(b).toBeGreaterThan(a);
    // No more than a crest half as high again as the limit.
    expect(c - b).toBeLessThan(0.5 * LIMIT * 0.03);
  });
});
