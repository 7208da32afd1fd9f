import { expect, test } from "vitest";
import { rehearse } from "../support/rehearse.ts";

/** Pose settled after the rest at the start, s. */
const SETTLED_S = 5;

test.each([
  { gait: "carangiform", frequencyHz: 1.1, seed: 1 },
  { gait: "carangiform", frequencyHz: 3, seed: 2 },
  { gait: "anguilliform", frequencyHz: 1.5, seed: 3 },
] as const)(
  "a rehearsed six-sensor swimmer's midline stays within 2 % of body length RMS of the truth: $gait at $frequencyHz Hz",
  async ({ gait, frequencyHz, seed }) => {
    let squares = 0;
    let points = 0;
    let worstLengthError = 0;
    const { pipeline } = await rehearse(
      { rig: "ribbon-foil", durationS: 60, seed, swimmer: { gait, frequencyHz } },
      ({ timeS, midline, rig }, source) => {
        if (timeS < SETTLED_S) return;
        const lengthM = rig.body.lengthMm / 1000;
        const truth = source.truthAt(timeS).midline;
        for (let i = 0; i < truth.length; i++)
          squares += ((truth[i]! - midline.positions[i]!) / lengthM) ** 2;
        points += truth.length / 3;
        worstLengthError = Math.max(worstLengthError, Math.abs(lengthOf(midline.positions) - lengthM));
      },
    );
    expect(points).toBeGreaterThan(200_000);
    expect(Math.sqrt(squares / points)).toBeLessThan(0.02);
    // Rounding of forty additions.
    expect(worstLengthError).toBeLessThan(1e-12);
    // One beat's frequency carries the orientation noise at its two crossings.
    expect(pipeline.tailbeat.frequencyHz! / frequencyHz - 1).toBeLessThan(0.01);
    expect(pipeline.tailbeat.frequencyHz! / frequencyHz - 1).toBeGreaterThan(-0.01);
  },
);

function lengthOf(positions: Float64Array): number {
  let length = 0;
  for (let i = 3; i < positions.length; i += 3) {
    length += Math.hypot(
      positions[i]! - positions[i - 3]!,
      positions[i + 1]! - positions[i - 2]!,
      positions[i + 2]! - positions[i - 1]!,
    );
  }
  return length;
}
