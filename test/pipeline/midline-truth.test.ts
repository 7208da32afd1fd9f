import { expect, test } from "vitest";
import { loadRig } from "../../bridge/rig/load.ts";
import { calibrated } from "../support/calibrated.ts";
import { rehearse } from "../support/rehearse.ts";

/** Pose settled after the rest at the start, s. */
const SETTLED_S = 5;
/** The nose is followed, s. */
const FOLLOWED_S = 8;

test.each([
  { gait: "carangiform", frequencyHz: 1.1, seed: 1 },
  { gait: "carangiform", frequencyHz: 3, seed: 2 },
  { gait: "anguilliform", frequencyHz: 1.5, seed: 3 },
] as const)(
  "a rehearsed six-sensor swimmer's midline stays within 0.8 % of body length RMS of the truth: $gait at $frequencyHz Hz",
  async ({ gait, frequencyHz, seed }) => {
    let squares = 0;
    let absoluteSquares = 0;
    let absolutePoints = 0;
    let noseSquares = 0;
    let noseErrorSquares = 0;
    let points = 0;
    let worstLengthError = 0;
    const { pipeline } = await rehearse(
      { rig: "ribbon-foil", durationS: 60, seed, swimmer: { gait, frequencyHz } },
      ({ timeS, midline, rig, headMotion }, source) => {
        if (timeS < SETTLED_S) return;
        const lengthM = rig.body.lengthMm / 1000;
        const { midline: truth, nose } = source.truthAt(timeS);
        const { positions } = midline;
        for (let i = 0; i < truth.length; i++) {
          squares += ((truth[i]! - (positions[i]! - positions[i % 3]!)) / lengthM) ** 2;
          if (timeS >= FOLLOWED_S)
            absoluteSquares += ((truth[i]! + nose[i % 3]! - positions[i]!) / lengthM) ** 2;
        }
        if (timeS >= FOLLOWED_S) {
          expect(headMotion!.held).toBeNull();
          absolutePoints += truth.length / 3;
          noseSquares += nose.reduce((sum, value) => sum + value * value, 0);
          noseErrorSquares += nose.reduce((sum, value, i) => sum + (value - positions[i]!) ** 2, 0);
        }
        points += truth.length / 3;
        worstLengthError = Math.max(worstLengthError, Math.abs(lengthOf(midline.positions) - lengthM));
      },
    );
    expect(points).toBeGreaterThan(200_000);
    // Biases as from the data sheet turn headings and pitches by some tenths of a degree; the interpolation's part is below 0.05 %.
    expect(Math.sqrt(squares / points)).toBeLessThan(0.008);
    // With the nose's own motion in it: no worse.
    expect(Math.sqrt(absoluteSquares / absolutePoints)).toBeLessThan(0.02);
    // Of the nose's motion: the guess between two sensors, biases, noise.
    expect(Math.sqrt(noseErrorSquares / noseSquares)).toBeLessThan(0.15);
    // Rounding of forty additions.
    expect(worstLengthError).toBeLessThan(1e-12);
    // One beat's frequency carries the orientation noise at its two crossings.
    expect(pipeline.tailbeat.frequencyHz! / frequencyHz - 1).toBeLessThan(0.01);
    expect(pipeline.tailbeat.frequencyHz! / frequencyHz - 1).toBeGreaterThan(-0.01);
  },
);

test("after calibration it stays within 0.6 % of body length, and its tail amplitude within 3 % of the true one", async () => {
  let squares = 0;
  let points = 0;
  const tail = { low: Infinity, high: -Infinity };
  const trueTail = { low: Infinity, high: -Infinity };
  await rehearse(
    { rig: calibrated(loadRig("ribbon-foil")), durationS: 60, seed: 4 },
    ({ timeS, midline, travel }, source) => {
      if (timeS < 10) return;
      expect(midline.inUse).toBe("wave");
      const truth = source.truthAt(timeS).midline;
      const fromNose = midline.positions.map((value, i) => value - midline.positions[i % 3]!);
      for (let i = 0; i < truth.length; i++) squares += ((truth[i]! - fromNose[i]!) / LENGTH_M) ** 2;
      points += truth.length / 3;
      widen(tail, travel.lateral(fromNose, 40));
      widen(trueTail, travel.lateral(truth, 40));
    },
  );
  expect(points).toBeGreaterThan(200_000);
  expect(Math.sqrt(squares / points)).toBeLessThan(0.006);
  expect(Math.abs((tail.high - tail.low) / (trueTail.high - trueTail.low) - 1)).toBeLessThan(0.03);
});

const LENGTH_M = 0.64;

function widen(range: { low: number; high: number }, value: number): void {
  range.low = Math.min(range.low, value);
  range.high = Math.max(range.high, value);
}

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
