import { expect, it } from "vitest";
import { fitAttitude } from "../../bridge/calibration/attitude-fit.ts";
import { type BendRecord, bendAxis, facings } from "../../bridge/calibration/bend.ts";
import { conjugate, rotate } from "../../bridge/numeric/quaternion.ts";
import { STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { attitude } from "./handled.ts";

const RATE_HZ = 200;
const STATIONS = [0, 0.3, 0.6, 0.9];
const H = 1e-4;

/** Curvature of a body of 1 m bent by hand to one side only, rad/m, in and out a little more than once a second. */
const curvature = (timeS: number) => 0.6 * (1 - Math.cos(7 * timeS));
/** An arc with its nose held: heading of the tangent and place behind the nose. */
const headingAt = (s: number, timeS: number) => -curvature(timeS) * s;
function placeAt(s: number, timeS: number): [number, number] {
  const k = curvature(timeS);
  if (k < 1e-9) return [-s, (k * s * s) / 2];
  return [-Math.sin(k * s) / k, (1 - Math.cos(k * s)) / k];
}

/** What ideal sensors read that face `facingDeg` to the left of the nose. */
function record(facingsDeg: readonly number[], seconds: number): BendRecord {
  const count = seconds * RATE_HZ;
  const readings: number[] = [];
  for (let t = 0; t < count; t++) {
    const timeS = t / RATE_HZ;
    STATIONS.forEach((s, i) => {
      const [before, now, after] = [-H, 0, H].map((h) => placeAt(s, timeS + h));
      const force = [0, 1].map((k) => (before![k]! - 2 * now![k]! + after![k]!) / H ** 2);
      const back = attitude((headingAt(s, timeS) * 180) / Math.PI + facingsDeg[i]!);
      conjugate(back, back);
      const felt = [0, 0, 0];
      rotate(felt, back, [...force, STANDARD_GRAVITY]);
      readings.push(0, 0, (headingAt(s, timeS + H) - headingAt(s, timeS - H)) / (2 * H), ...felt);
    });
  }
  return { sensorCount: STATIONS.length, count, stepS: new Float64Array(count).fill(1 / RATE_HZ), readings };
}

const level = {
  rotation: Float64Array.of(1, 0, 0, 0),
  still: [0, 0, STANDARD_GRAVITY],
  bias: [0, 0, 0],
};

it("an arc bent to one side by hand, nose held, tells which way each sensor faces, and which sense", () => {
  const facing = [10, -170, 95, -60];
  const found = facings(
    record(facing, 10),
    STATIONS.map(() => level),
    [0.3, 0.3, 0.3],
  );
  // The sensor at the nose, which is held, feels nothing and says nothing.
  expect(found[0]!.moved).toBeLessThan(0.01);
  found.slice(1).forEach(({ angle }, i) => {
    // The arc's tangent is exactly even: what is left is the second difference over two steps of 5 ms.
    const off = (angle * 180) / Math.PI - facing[i + 1]!;
    expect(Math.abs(off - 360 * Math.round(off / 360))).toBeLessThan(0.05);
  });
});

it("a bend turns every sensor about the body's z, whichever way it faces", () => {
  const { axis, sigma, rate } = bendAxis(record([0, 0, 0, 0], 5), 3);
  expect(Math.abs(axis[2]!)).toBeCloseTo(1, 12);
  expect(sigma).toBeLessThan(1e-6);
  // 0.9 m of a curvature of 0.6 sin(7 t) 7.
  expect(rate).toBeCloseTo((0.9 * 0.6 * 7) / Math.SQRT2, 1);
});

it("directions seen in both frames give the rotation between them, and how well it is known", () => {
  const q = attitude(120, -35, 70);
  const back = conjugated(q);
  const seen = (body: readonly number[], sigma: number) => {
    const sensor = new Float64Array(3);
    rotate(sensor, back, body);
    return { sensor, body, sigma };
  };
  const fit = fitAttitude([seen([0, 0, 1], 0.01), seen([1, 0, 0], 0.02)]);
  expect(Math.abs(fit.rotation.reduce((sum, value, k) => sum + value * q[k]!, 0))).toBeCloseTo(1, 12);
  // About z only the second direction speaks.
  expect(fit.sigma).toBeCloseTo(0.02, 6);
  expect(Math.abs(fit.worst[2]!)).toBeCloseTo(1, 6);
});

function conjugated(q: Float64Array): Float64Array {
  const out = new Float64Array(4);
  conjugate(out, q);
  return out;
}
