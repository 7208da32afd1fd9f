/**
 * Complex orthogonal decomposition: B. F. Feeny, J. Sound Vib. 310 (2008) 77-90. A pure travelling wave has index 1, a pure
 * standing wave 0; of a sum of the two in space quadrature the index is known in closed form.
 */
import { expect, test } from "vitest";
import { travellingIndex } from "../../bridge/wave/travelling-index.ts";
import { lastCycle } from "../wave/waves.ts";

/** Whole waves on the body, each point counted once, so that sine and cosine along it are orthogonal. */
const POINTS = 40;

/** Terms of a cosine and b sine of the first harmonic: y = p(x) cos(theta) + q(x) sin(theta). */
function index(p: (x: number) => number, q: (x: number) => number): number {
  const terms = new Float64Array(POINTS * 7);
  for (let point = 0; point < POINTS; point++) {
    terms[7 * point + 1] = p(point / POINTS);
    terms[7 * point + 2] = q(point / POINTS);
  }
  return travellingIndex(terms, POINTS);
}

const cosine = (x: number) => Math.cos(4 * Math.PI * x);
const sine = (x: number) => Math.sin(4 * Math.PI * x);

test("a pure travelling wave has index 1, either way it runs", () => {
  expect(index(cosine, sine)).toBeCloseTo(1, 12);
  expect(index(cosine, (x) => -sine(x))).toBeCloseTo(1, 12);
});

test("a pure standing wave has index 0, whatever its phase in time", () => {
  // Rounding of squares: the root of 1e-16.
  expect(index(cosine, () => 0)).toBeCloseTo(0, 7);
  expect(
    index(
      (x) => 0.6 * sine(x),
      (x) => 0.8 * sine(x),
    ),
  ).toBeCloseTo(0, 7);
});

test("waves of amplitudes a forwards and b backwards have index (a - b) / (a + b)", () => {
  // a cos(theta - kx) + b cos(theta + kx): real and imaginary parts (a + b) cos kx and (a - b) sin kx.
  for (const [a, b] of [
    [1, 0.2],
    [1, 0.5],
    [3, 2.4],
  ] as const) {
    expect(
      index(
        (x) => (a + b) * cosine(x),
        (x) => (a - b) * sine(x),
      ),
    ).toBeCloseTo((a - b) / (a + b), 12);
  }
});

test("a body seen sweep by sweep: a wave of whole lengths is close to 1, a standing one to 0", () => {
  const phase = (t: number) => 2 * Math.PI * 1.5 * t;
  const forwards = lastCycle((x, t) => 0.05 * Math.sin(phase(t) - 2 * Math.PI * x));
  // The tail tip repeats the nose: 41 points are one more than a whole wave, which puts the squares off by 1 in 40.
  expect(forwards.numbers.travellingIndex).toBeGreaterThan(0.97);
  const standing = lastCycle((x, t) => 0.05 * Math.cos(2 * Math.PI * x) * Math.sin(phase(t)));
  expect(standing.numbers.travellingIndex).toBeLessThan(1e-6);
});
