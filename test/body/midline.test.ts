import fc from "fast-check";
import { expect, test } from "vitest";
import { Midline } from "../../bridge/body/midline.ts";
import { multiply, normalise } from "../../bridge/numeric/quaternion.ts";
import { TRUST } from "../../bridge/sweep.ts";

const DEG = Math.PI / 180;
const STATIONS = [0.06, 0.24, 0.41, 0.58, 0.75, 0.92];
const POINTS = 41;
const LENGTH_M = 0.64;

const turn = (axis: 1 | 2 | 3, angle: number): Float64Array => {
  const q = new Float64Array([Math.cos(angle / 2), 0, 0, 0]);
  q[axis] = Math.sin(angle / 2);
  return q;
};

const yaw = (angle: number) => turn(3, angle);

function product(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(4);
  multiply(out, a, b);
  return out;
}

const stack = (quaternions: readonly Float64Array[]) => Float64Array.from(quaternions.flatMap((q) => [...q]));

function lengthOf(positions: Float64Array): number {
  let length = 0;
  for (let i = 3; i < positions.length; i += 3) {
    length += Math.hypot(
      positions[i] - positions[i - 3],
      positions[i + 1] - positions[i - 2],
      positions[i + 2] - positions[i - 1],
    );
  }
  return length;
}

const newMidline = (stations: readonly number[] = STATIONS, pointCount = POINTS) =>
  new Midline({ lengthM: LENGTH_M, stations, pointCount });

test("before the first step the body is straight, its nose to the east", () => {
  const { positions } = newMidline();
  expect([...positions.subarray(0, 3)]).toEqual([0, 0, 0]);
  expect(positions[120]).toBeCloseTo(-LENGTH_M, 12);
  expect(lengthOf(positions)).toBeCloseTo(LENGTH_M, 12);
});

test("whatever the orientations and losses, the length is the body's", () => {
  const component = fc.double({ min: -1, max: 1, noNaN: true });
  const midline = newMidline();
  const trust = fc.array(fc.constantFrom(TRUST.GOOD, TRUST.CLIPPED, TRUST.LOST), {
    minLength: 6,
    maxLength: 6,
  });
  fc.assert(
    fc.property(fc.array(component, { minLength: 24, maxLength: 24 }), trust, (numbers, states) => {
      const orientations = Float64Array.from(numbers);
      for (let i = 0; i < 24; i += 4) normalise(orientations, orientations, i, i);
      midline.step(orientations, Uint8Array.from(states));
      // 40 segments, each a few roundings of a double from its length.
      expect(Math.abs(lengthOf(midline.positions) - LENGTH_M)).toBeLessThan(1e-12);
    }),
    { seed: 1, numRuns: 300 },
  );
});

test("equal orientations give a straight body along their x axis, tail behind, with their roll", () => {
  const midline = newMidline();
  const heading = 50 * DEG;
  const noseUp = 10 * DEG; // nose up turns about -y
  const q = product(product(yaw(heading), turn(2, -noseUp)), turn(1, 7 * DEG));
  midline.step(stack(STATIONS.map(() => q)), new Uint8Array(6));
  const tail = midline.positions.subarray(120);
  expect(tail[0]).toBeCloseTo(-LENGTH_M * Math.cos(noseUp) * Math.cos(heading), 12);
  expect(tail[1]).toBeCloseTo(-LENGTH_M * Math.cos(noseUp) * Math.sin(heading), 12);
  expect(tail[2]).toBeCloseTo(-LENGTH_M * Math.sin(noseUp), 12);
  for (const roll of rollOf(midline)) expect(roll).toBeCloseTo(7 * DEG, 12);
});

test("headings in proportion to the station bend the body into a circular arc", () => {
  // Sensors at both ends, a quarter turn between: slerp about one axis is linear, so the chain inscribes the arc.
  const midline = newMidline([0, 1], 2001);
  midline.step(stack([yaw(0), yaw(90 * DEG)]), new Uint8Array(2));
  const radius = LENGTH_M / (90 * DEG);
  // Closed form: the heading grows to 90 deg at the tail, so the tail lies radius behind and radius to the right.
  // Midpoint rule over 2000 segments: off by (90 deg / 2000)² / 24 = 3e-8 of the radius.
  expect(Math.abs(midline.positions[6000] + radius)).toBeLessThan(1e-7 * radius);
  expect(Math.abs(midline.positions[6001] + radius)).toBeLessThan(1e-7 * radius);
  expect(midline.positions[6002]).toBe(0);
});

test("outside the sensors the body is straight; between them the heading changes evenly", () => {
  const midline = newMidline([0.25, 0.75]);
  midline.step(stack([yaw(0), yaw(60 * DEG)]), new Uint8Array(2));
  const p = midline.positions;
  const headings = Array.from({ length: 40 }, (_, k) =>
    Math.atan2(p[3 * k + 1] - p[3 * k + 4], p[3 * k] - p[3 * k + 3]),
  );
  headings.forEach((heading, k) => {
    const station = (k + 0.5) / 40;
    const share = Math.min(1, Math.max(0, (station - 0.25) / 0.5));
    expect(heading).toBeCloseTo(share * 60 * DEG, 10); // differences of positions near 0.6 m: 1e-15 / 0.016 m
  });
});

test("a quaternion and its negative are the same orientation", () => {
  const plain = newMidline();
  const flipped = newMidline();
  const quaternions = STATIONS.map((s) => product(yaw(120 * s * DEG), turn(1, 30 * s * DEG)));
  plain.step(stack(quaternions), new Uint8Array(6));
  flipped.step(stack(quaternions.map((q, i) => (i % 2 === 0 ? q : q.map((v) => -v)))), new Uint8Array(6));
  plain.positions.forEach((v, i) => {
    expect(flipped.positions[i]).toBeCloseTo(v, 14);
  });
});

test("a lost sensor drops out: the rest give what they would give without it", () => {
  const midline = newMidline();
  const quaternions = STATIONS.map((s) => yaw(90 * Math.sin(5 * s) * DEG));
  const trust = new Uint8Array(6);
  for (const lost of [0, 2, 5]) {
    trust.fill(TRUST.GOOD);
    trust[lost] = TRUST.LOST;
    midline.step(stack(quaternions), trust);
    const without = newMidline(STATIONS.filter((_, i) => i !== lost));
    without.step(stack(quaternions.filter((_, i) => i !== lost)), new Uint8Array(5));
    expect(midline.positions).toEqual(without.positions);
    expect(rollOf(midline)).toEqual(rollOf(without));
  }
  trust.fill(TRUST.GOOD);
  midline.step(stack(quaternions), trust);
  const whole = newMidline();
  whole.step(stack(quaternions), trust);
  expect(midline.positions).toEqual(whole.positions);
});

test("one sensor left gives a straight body; none left keeps the last shape", () => {
  const midline = newMidline();
  const trust = new Uint8Array(6).fill(TRUST.LOST);
  trust[3] = TRUST.BRIDGED;
  midline.step(stack(STATIONS.map((s) => yaw(90 * s * DEG))), trust);
  const heading = 90 * STATIONS[3] * DEG;
  expect(midline.positions[120]).toBeCloseTo(-LENGTH_M * Math.cos(heading), 12);
  expect(midline.positions[121]).toBeCloseTo(-LENGTH_M * Math.sin(heading), 12);
  const kept = midline.positions.slice();
  trust[3] = TRUST.LOST;
  midline.step(stack(STATIONS.map(() => yaw(0))), trust);
  expect(midline.positions).toEqual(kept);
});

function rollOf(midline: Midline): Float64Array {
  const roll = new Float64Array(midline.positions.length / 3);
  midline.rollInto(roll);
  return roll;
}
