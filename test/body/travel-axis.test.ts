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
    const axis = new TravelAxis();
    axis.step(STEP_S, straightBody(heading * DEG));
    expect(axis.heading).toBeCloseTo(heading * DEG, 12); // closed form: rounding only
  }
});

test("in travel axes the tail lies behind the nose, heights are kept, and output may be the input", () => {
  const body = straightBody(130 * DEG, 20 * DEG);
  const axis = new TravelAxis();
  axis.step(STEP_S, body);
  axis.toTravelAxes(body, body);
  expect(body[3]).toBeCloseTo(-Math.cos(20 * DEG), 12);
  expect(body[4]).toBeCloseTo(0, 12);
  expect(body[5]).toBeCloseTo(-Math.sin(20 * DEG), 12);
});

test("lateral is positive to the left and agrees with toTravelAxes", () => {
  const axis = new TravelAxis();
  axis.step(STEP_S, straightBody(90 * DEG)); // travelling north: west is left
  const body = new Float64Array([0, 0, 0, -0.2, -1, 0]);
  const out = new Float64Array(6);
  axis.toTravelAxes(body, out);
  expect(axis.lateral(body, 1)).toBeCloseTo(0.2, 12);
  expect(axis.lateral(body, 1)).toBe(out[4]);
});

test("a chord that swings 20 deg at 1 Hz moves the axis by no more than the low pass leaves", () => {
  const axis = new TravelAxis(4);
  let worst = 0;
  for (let t = 0; t < 40; t += STEP_S) {
    axis.step(STEP_S, straightBody((30 + 20 * Math.sin(2 * Math.PI * t)) * DEG));
    if (t > 20) worst = Math.max(worst, Math.abs(axis.heading / DEG - 30));
  }
  // First-order low pass: 20 deg / (2 pi x 1 Hz x 4 s) = 0.80 deg; five time constants after the start its own
  // beginning has left less than 1 % of that again. A tenth more covers both.
  expect(worst).toBeLessThan(0.88);
  expect(worst).toBeGreaterThan(0.6);
});

test("a body first seen in mid-swing is averaged over what has been seen, not held where it began", () => {
  const axis = new TravelAxis(4);
  for (let t = 0; t < 1 - STEP_S / 2; t += STEP_S) {
    axis.step(STEP_S, straightBody(20 * Math.cos(2 * Math.PI * t) * DEG));
  }
  // After one whole beat a true mean is 0; the running mean's weights favour neither half by more than a few per cent.
  expect(Math.abs(axis.heading / DEG)).toBeLessThan(1);
});

test("a turn is followed with a lag of the time constant", () => {
  const axis = new TravelAxis(4);
  const rate = 3 * DEG; // rad/s, slow enough that chord vectors average like angles
  let t = 0;
  for (; t < 60; t += STEP_S) axis.step(STEP_S, straightBody(rate * t));
  const lagS =
    (rate * t - axis.heading - 2 * Math.PI * Math.round((rate * t - axis.heading) / 2 / Math.PI)) / rate;
  // atan(rate x 4 s) / rate = 3.94 s for vectors; one step of 0.01 s either side.
  expect(lagS).toBeGreaterThan(3.9);
  expect(lagS).toBeLessThan(3.98);
});

test("headings either side of south average to south, without a jump at +-180 deg", () => {
  const axis = new TravelAxis();
  for (let i = 0; i < 1000; i++) axis.step(STEP_S, straightBody((i % 2 === 0 ? 175 : -175) * DEG));
  // The last sweep weighs 1/400 of 10 deg.
  expect(Math.abs(axis.heading) / DEG).toBeGreaterThan(179.9);
});

test("a body with no horizontal direction leaves the axis as it was", () => {
  const upright = new Float64Array([0, 0, 0, 0, 0, -1]);
  const axis = new TravelAxis();
  axis.step(STEP_S, upright);
  expect(axis.heading).toBe(0);
  axis.step(STEP_S, straightBody(40 * DEG));
  axis.step(STEP_S, upright);
  expect(axis.heading / DEG).toBeCloseTo(40, 9);
});
