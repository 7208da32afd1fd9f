/**
 * How well the midline of an exact waving body is met: sensors from 5 % to 95 % of the body, no errors but those of the
 * interpolation. Distances are nose on nose over 41 points, sideways errors about their mean along the body.
 */
import { expect, test } from "vitest";
import { type Interpolation, Midline } from "../../bridge/body/midline.ts";
import { ExactWave, evenStations, fidelity } from "./exact-wave.ts";

const POINTS = 41;

function measure(interpolation: Interpolation, gait: "carangiform" | "anguilliform", count: number) {
  const stations = evenStations(count);
  const midline = new Midline({ lengthM: 1, stations, pointCount: POINTS, interpolation });
  const wave = new ExactWave(gait, stations, POINTS);
  const trust = new Uint8Array(count);
  return fidelity(midline, wave, () => midline.step(wave.orientations, trust));
}

// Bounds are a hundredth above what the method gives: there is no noise, so any change of method shows.
test.each([
  ["slerp", "carangiform", 4, 1.44, 1.18],
  ["slerp", "carangiform", 6, 0.48, 0.4],
  ["slerp", "anguilliform", 6, 1.8, 0.92],
  ["smooth", "carangiform", 4, 0.96, 0.78],
  ["smooth", "carangiform", 6, 0.13, 0.12],
  ["smooth", "anguilliform", 6, 0.53, 0.33],
] as const)(
  "%s, %s, %d sensors: within %f of a hundredth of body length, sideways within %f",
  (interpolation, gait, count, distance, sideways) => {
    const found = measure(interpolation, gait, count);
    expect(found.distance).toBeLessThan(distance);
    expect(found.distance).toBeGreaterThan(0.97 * distance - 0.01);
    expect(found.sideways).toBeLessThan(sideways);
  },
);
