import { expect, test } from "vitest";
import { TravelAxis } from "../../bridge/body/travel-axis.ts";

const DEG = Math.PI / 180;
const STEP_S = 0.01;

/** A straight body of two points: nose at the origin, tail tip 1 m behind along `heading`. */
function straightBody(heading: number, pitch = 0): Float64Array {
  const c = Math.cos(pitch);
  return new Float64Array([0, 0, 0, -c * Math.cos(heading), -c * Math.sin(heading), -Math.sin(pitch)]);
}

test("the first sweep sets the axis: nose ahead at once", () => {
  for (const heading of [-170, -60, 0, 45, 179]) {
    const axis = new TravelAxis(100);
    axis.step(STEP_S, straightBody(heading * DEG), null);
    expect(axis.heading).toBeCloseTo(heading * DEG, 12); // closed form: rounding only
  }
});

test("in travel axes the tail lies behind the nose, heights are kept, and output may be the input", () => {
  const body = straightBody(130 * DEG, 20 * DEG);
  const axis = new TravelAxis(100);
  axis.step(STEP_S, body, null);
  axis.toTravelAxes(body, body);
  expect(body[3]).toBeCloseTo(-Math.cos(20 * DEG), 12);
  expect(body[4]).toBeCloseTo(0, 12);
  expect(body[5]).toBeCloseTo(-Math.sin(20 * DEG), 12);
});

test("lateral is positive to the left and agrees with toTravelAxes", () => {
  const axis = new TravelAxis(100);
  axis.step(STEP_S, straightBody(90 * DEG), null); // travelling north: west is left
  const body = new Float64Array([0, 0, 0, -0.2, -1, 0]);
  const out = new Float64Array(6);
  axis.toTravelAxes(body, out);
  expect(axis.lateral(body, 1)).toBeCloseTo(0.2, 12);
  expect(axis.lateral(body, 1)).toBe(out[4]);
});

test.each([0.5, 1.1, 3, 8])(
  "a chord that swings 20 deg at %d Hz leaves the axis where it is",
  (frequencyHz) => {
    const axis = new TravelAxis(100);
    let worst = 0;
    for (let t = 0; t < 20; t += STEP_S) {
      axis.step(
        STEP_S,
        straightBody((30 + 20 * Math.sin(2 * Math.PI * frequencyHz * t)) * DEG),
        1 / frequencyHz,
      );
      if (t > 5) worst = Math.max(worst, Math.abs(axis.heading / DEG - 30));
    }
    // Over whole beats the swing cancels but for its sampling: at 8 Hz a step is a twelfth of a beat.
    expect(worst).toBeLessThan(0.1);
  },
);

test("a body first seen in mid-swing is averaged over what has been seen, not held where it began", () => {
  const axis = new TravelAxis(100);
  for (let t = 0; t < 1 - STEP_S / 2; t += STEP_S) {
    axis.step(STEP_S, straightBody(20 * Math.cos(2 * Math.PI * t) * DEG), null);
  }
  // One whole beat has a mean of 0; the sum over its steps is exact but for rounding.
  expect(Math.abs(axis.heading / DEG)).toBeLessThan(1e-6);
});

test.each([
  [null, 1],
  [0.9, 0.45],
  [0.3, 0.45],
])("a turn is followed with a lag of half the window (period %s s: %s s)", (periodS, lagS) => {
  const axis = new TravelAxis(100);
  const rate = 3 * DEG; // rad/s, slow enough that chord vectors average like angles
  let t = 0;
  for (; t < 50; t += STEP_S) axis.step(STEP_S, straightBody(rate * t), periodS);
  const lag =
    (rate * t - axis.heading - 2 * Math.PI * Math.round((rate * t - axis.heading) / 2 / Math.PI)) / rate;
  // One step either side: the turn is sampled.
  expect(Math.abs(lag - lagS)).toBeLessThan(1.5 * STEP_S);
});

test("the window follows a change of beat, longer and shorter", () => {
  const axis = new TravelAxis(100);
  let t = 0;
  for (const periodS of [2, 0.4, null, 4, 1]) {
    for (const end = t + 12; t < end; t += STEP_S) {
      axis.step(
        STEP_S,
        straightBody((50 + 15 * Math.sin((2 * Math.PI * t) / (periodS ?? 1))) * DEG),
        periodS,
      );
    }
    expect(Math.abs(axis.heading / DEG - 50)).toBeLessThan(0.1);
  }
});

test("headings either side of south average to south, without a jump at +-180 deg", () => {
  const axis = new TravelAxis(100);
  for (let i = 0; i < 1000; i++) axis.step(STEP_S, straightBody((i % 2 === 0 ? 175 : -175) * DEG), null);
  // 200 sweeps in the window: as many of the one as of the other, to one sweep.
  expect(Math.abs(axis.heading) / DEG).toBeGreaterThan(179.9);
});

test("a body with no horizontal direction leaves the axis as it was", () => {
  const upright = new Float64Array([0, 0, 0, 0, 0, -1]);
  const axis = new TravelAxis(100);
  axis.step(STEP_S, upright, null);
  expect(axis.heading).toBe(0);
  axis.step(STEP_S, straightBody(40 * DEG), null);
  axis.step(STEP_S, upright, null);
  expect(axis.heading / DEG).toBeCloseTo(40, 9);
});

test("a body that comes to hang steeply keeps the axis it had, wherever it swings", () => {
  const axis = new TravelAxis(100);
  for (let i = 0; i < 300; i++) axis.step(STEP_S, straightBody(40 * DEG), null);
  for (let i = 0; i < 1000; i++) axis.step(STEP_S, straightBody(i * DEG, 85 * DEG), null);
  // The axis holds once level chords fill less than 0.3 of the 2 s window: 1.4 s of cos 85 deg beside 0.6 s, 11.5 deg.
  expect(Math.abs(axis.heading / DEG - 40)).toBeLessThan(11.5);
});
