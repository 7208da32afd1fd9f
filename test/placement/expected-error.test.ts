import { expect, test } from "vitest";
import { Midline } from "../../bridge/body/midline.ts";
import { polynomialGait } from "../../bridge/numeric/gaits.ts";
import { fromRotationVector, multiply } from "../../bridge/numeric/quaternion.ts";
import { ErrorModel } from "../../bridge/placement/expected-error.ts";
import { evenPlacement } from "../../bridge/placement/search.ts";
import { SwimmingBody } from "../../bridge/placement/swimming-body.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { NOISE, RANGE, swimmerWith } from "./models.ts";

const REPORTED = { moments: 48, noiseMoments: 4, learnedBeats: 0 };
const modelOf = (gait: "carangiform" | "anguilliform") =>
  new ErrorModel({ ...swimmerWith(gait), ...REPORTED });

test("one sensor's error turns the whole body: closed form", () => {
  const stiff = polynomialGait([1e-6], 1);
  const { noise } = new ErrorModel({ ...swimmerWith("carangiform"), gait: stiff, ...REPORTED }).expect([0.5]);
  // Point k of 0..40 moves by k/40 times the angle, sideways by heading, up and down by inclination. The mean square of
  // k/40 over 41 points is 81 / 240. Turned by 1e-3 rad, chord and arc differ by 4e-8 of it.
  const expected = Math.hypot(NOISE.heading, NOISE.inclination) * Math.sqrt(81 / 240);
  expect(noise / expected).toBeCloseTo(1, 5);
});

test("the noise's share is what random orientation errors make of the midline, roll included", () => {
  const { gait, pointCount } = swimmerWith("anguilliform");
  const stations = evenPlacement(6, RANGE);
  const { local } = modelOf("anguilliform").expect(stations);
  const midline = new Midline({ lengthM: 1, stations, pointCount });
  const random = Random.forStream(7, 0);
  const trust = new Uint8Array(6);
  const exact = new Float64Array(24);
  const noisy = new Float64Array(24);
  const turn = new Float64Array(4);
  const squares = new Float64Array(pointCount);
  const bodies = Array.from({ length: 20 }, (_, i) => new SwimmingBody(gait, (2 * Math.PI * i) / 20));
  const draws = 4000;
  for (let draw = 0; draw < draws; draw++) {
    const body = bodies[draw % bodies.length];
    stations.forEach((station, i) => {
      fromRotationVector(exact, [0, 0, body.angle(station)], 4 * i);
      const [roll, pitch, heading] = [NOISE.inclination, NOISE.inclination, NOISE.heading].map(
        (sigma) => sigma * random.normal(),
      );
      fromRotationVector(turn, [roll, pitch, 0]);
      multiply(noisy, exact, turn, 4 * i, 4 * i);
      fromRotationVector(turn, [0, 0, heading]);
      multiply(noisy, turn, noisy, 4 * i, 0, 4 * i);
    });
    midline.step(exact, trust);
    const still = midline.positions.slice();
    midline.step(noisy, trust);
    for (let at = 0; at < still.length; at++) {
      squares[Math.floor(at / 3)] += (midline.positions[at] - still[at]) ** 2 / draws;
    }
  }
  // A standard deviation from 4000 draws of two axes is known to 1 / sqrt(2 x 8000) = 0.8 %; within 4 of those.
  for (const point of [5, 20, 40]) {
    expect(Math.sqrt(squares[point]) / local.noise[point]).toBeGreaterThan(0.968);
    expect(Math.sqrt(squares[point]) / local.noise[point]).toBeLessThan(1.032);
  }
});

test("shape and noise add up as independent errors, in all and at each point; the nose is exact", () => {
  const { shape, noise, total, local } = modelOf("carangiform").expect([0.1, 0.4, 0.6, 0.9]);
  expect(total).toBeCloseTo(Math.hypot(shape, noise), 14);
  for (let point = 0; point < 41; point++) {
    expect(local.total[point]).toBeCloseTo(Math.hypot(local.shape[point], local.noise[point]), 14);
  }
  expect(local.total[0]).toBe(0);
  const meanSquare = local.total.reduce((sum, error) => sum + error ** 2, 0) / 41;
  expect(Math.sqrt(meanSquare)).toBeCloseTo(total, 14);
});

test("the fewer moments of the search give the same error", () => {
  for (const gait of ["carangiform", "anguilliform"] as const) {
    const searched = new ErrorModel({ ...swimmerWith(gait), moments: 5, noiseMoments: 1, learnedBeats: 0 });
    for (const count of [3, 6, 12]) {
      const stations = evenPlacement(count, RANGE);
      // Of the shape's square five moments leave harmonics from the tenth on; the noise changes little over the cycle.
      expect(searched.expect(stations).total / modelOf(gait).expect(stations).total).toBeCloseTo(1, 2);
    }
  }
});

test("the interpolation counts: a smooth midline errs less than half as much in shape, and little more by noise", () => {
  const stations = evenPlacement(6, RANGE);
  const smooth = new ErrorModel({ ...swimmerWith("carangiform", "smooth"), ...REPORTED }).expect(stations);
  const slerp = modelOf("carangiform").expect(stations);
  expect(smooth.shape).toBeLessThan(0.5 * slerp.shape);
  expect(smooth.noise).toBeLessThan(1.1 * slerp.noise);
});

test("what learns from the beats is told their phase, a cycle after so many learned ones; what does not is told none", () => {
  const told: (number | undefined)[] = [];
  const model = (learnedBeats: number) =>
    new ErrorModel({
      ...swimmerWith("carangiform"),
      moments: 4,
      noiseMoments: 1,
      learnedBeats,
      rebuilding: () => ({ positions: new Float64Array(123), step: (_, __, phase) => told.push(phase) }),
    });
  model(2).expect([0.5]);
  // Two beats of four moments, then the cycle that counts, its first moment twice more: one sensor turned about two axes.
  const quarters = [0, 1, 2, 3, 4, 5, 6, 7, 8, 8, 8, 9, 10, 11];
  expect(told).toEqual(quarters.map((quarter) => (quarter * Math.PI) / 2));
  told.length = 0;
  model(0).expect([0.5]);
  expect(new Set(told)).toEqual(new Set([undefined]));
});

test("with sensors at every piece of the midline, shape and tail amplitude are the true ones", () => {
  const stations = Array.from({ length: 40 }, (_, i) => (i + 0.5) / 40);
  const { shape, tailAmplitude } = modelOf("carangiform").expect(stations);
  // Each piece lies along the tangent at its middle: off by the midpoint rule's error, curvature² / (24 x 40²) < 1e-3.
  expect(shape).toBeLessThan(1e-3);
  expect(tailAmplitude.rebuilt / tailAmplitude.true).toBeCloseTo(1, 2);
});
