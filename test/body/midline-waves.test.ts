/**
 * How well the midline of an exact waving body is met: sensors from 5 % to 95 % of the body, no errors but those of the
 * interpolation. Distances are nose on nose over 41 points, sideways errors about their mean along the body, both RMS over
 * a cycle and in per cent of body length.
 */
import { expect, test } from "vitest";
import { Midline } from "../../bridge/body/midline.ts";
import type { Interpolation } from "../../bridge/wire/messages.ts";
import { ExactWave, evenStations, fidelity } from "./exact-wave.ts";

const POINTS = 41;
const SWEEPS_A_BEAT = 80;
const BEATS_TO_LEARN = 8;

function measure(interpolation: Interpolation, gait: "carangiform" | "anguilliform", count: number) {
  const stations = evenStations(count);
  const midline = new Midline({ lengthM: 1, stations, pointCount: POINTS, interpolation });
  const wave = new ExactWave(gait, stations, POINTS);
  const trust = new Uint8Array(count);
  const step = (phase: number) =>
    midline.step(wave.orientations, trust, 1 / SWEEPS_A_BEAT, { phase, periodicShare: 1 });
  for (let sweep = 0; sweep < BEATS_TO_LEARN * SWEEPS_A_BEAT; sweep++) {
    const phase = (2 * Math.PI * sweep) / SWEEPS_A_BEAT;
    wave.moveTo(phase);
    step(phase);
  }
  return { midline, ...fidelity(midline, wave, step, 2 * Math.PI * BEATS_TO_LEARN) };
}

// There is no noise: the bounds are what each method gives, rounded up by a few per cent.
test.each([
  ["slerp", "carangiform", 4, 1.44, 1.18, 3],
  ["slerp", "carangiform", 6, 0.48, 0.4, 2],
  ["slerp", "anguilliform", 6, 1.81, 0.92, 12],
  ["smooth", "carangiform", 4, 0.96, 0.78, 21],
  ["smooth", "carangiform", 6, 0.13, 0.12, 3],
  ["smooth", "anguilliform", 6, 0.53, 0.33, 5],
  ["wave", "carangiform", 4, 0.027, 0.025, 1.1],
  ["wave", "carangiform", 6, 0.01, 0.008, 0.3],
  ["wave", "anguilliform", 6, 0.022, 0.016, 0.6],
  ["wave", "anguilliform", 4, 0.04, 0.03, 1.2],
  // Beyond the end sensors the bend goes on for one gap only, here 1.4 % of the body.
  ["wave", "carangiform", 64, 0.032, 0.013, 0.4],
] as const)(
  "%s, %s, %d sensors: within %f of a hundredth of body length, sideways %f, tail amplitude %f",
  (interpolation, gait, count, distance, sideways, tailAmplitude) => {
    const found = measure(interpolation, gait, count);
    expect(found.midline.inUse).toBe(interpolation);
    expect(found.distance).toBeLessThan(distance);
    expect(found.sideways).toBeLessThan(sideways);
    expect(Math.abs(found.tailAmplitude)).toBeLessThan(tailAmplitude);
  },
);

test.each([
  ["anguilliform", 3, 0.45],
  ["carangiform", 2, 0.9],
] as const)(
  "%s, %d sensors %f of the body apart, over half a wavelength: smooth, and it says why",
  (gait, count, apart) => {
    const { midline, distance } = measure("wave", gait, count);
    const [first, second] = evenStations(count);
    expect(second - first).toBeCloseTo(apart, 12);
    expect(midline.inUse).toBe("smooth");
    expect(midline.whySmooth).toBe("sensors too far apart");
    expect(distance).toBe(measure("smooth", gait, count).distance);
  },
);
