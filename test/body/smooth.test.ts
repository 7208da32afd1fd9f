import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { Smooth } from "../../bridge/body/smooth.ts";
import {
  arcBetween,
  conjugate,
  multiply,
  normalise,
  toRotationVector,
} from "../../bridge/numeric/quaternion.ts";

const DEG = Math.PI / 180;
const STATIONS = [0.06, 0.24, 0.41, 0.58, 0.75, 0.92];
/** A hundredth of a per cent of the body from place to place: every station is one. */
const PLACES = 10_001;
const placeOf = (station: number) => Math.round(station * (PLACES - 1));

function turned(yaw: number, pitch = 0, roll = 0): Float64Array {
  const about = (axis: number, angle: number) => {
    const q = new Float64Array([Math.cos(angle / 2), 0, 0, 0]);
    q[axis] = Math.sin(angle / 2);
    return q;
  };
  const q = about(3, yaw);
  multiply(q, q, about(2, pitch));
  multiply(q, q, about(1, roll));
  return q;
}

function through(stations: readonly number[], quaternions: readonly Float64Array[]) {
  const smooth = new Smooth(stations, PLACES);
  smooth.place(
    Uint16Array.from(stations, (_, i) => i),
    stations.length,
  );
  smooth.take(Float64Array.from(quaternions.flatMap((q) => [...q])));
  return (place: number) => {
    const q = new Float64Array(4);
    smooth.at(place, q);
    return q;
  };
}

/** Bodies with steep bends in both planes and twists: up to 100 deg between neighbours. */
const bodies = fc
  .array(
    fc.tuple(
      fc.double({ min: -1, max: 1, noNaN: true }),
      fc.double({ min: -1, max: 1, noNaN: true }),
      fc.double({ min: -1, max: 1, noNaN: true }),
    ),
    { minLength: 6, maxLength: 6 },
  )
  .map((turns) => {
    let q = turned(3, 0.4, -2);
    return turns.map(([yaw, pitch, roll]) => {
      const next = new Float64Array(4);
      multiply(next, q, turned(yaw, pitch, roll));
      normalise(next, next);
      q = next;
      return next;
    });
  });

describe("any bend and twist", () => {
  test("every sensor's own orientation is met", () => {
    fc.assert(
      fc.property(bodies, (quaternions) => {
        const at = through(STATIONS, quaternions);
        // Rounding of a log and an exp.
        STATIONS.forEach((station, i) => {
          expect(arcBetween(at(placeOf(station)), quaternions[i])).toBeLessThan(1e-14);
        });
        // Just before a sensor the cubic of the gap ahead of it must have come there too.
        STATIONS.slice(1).forEach((station, i) => {
          expect(arcBetween(at(placeOf(station) - 1), quaternions[i + 1])).toBeLessThan(5e-3);
        });
      }),
      { seed: 1, numRuns: 100 },
    );
  });

  test("bend and twist along the body go on through every sensor without a jump", () => {
    fc.assert(
      fc.property(bodies, (quaternions) => {
        const at = through(STATIONS, quaternions);
        for (const station of STATIONS) {
          const place = placeOf(station);
          const before = rate(at(place - 1), at(place));
          const behind = rate(at(place), at(place + 1));
          // One place apart a curved line differs by its second derivative: at most some hundreds of rad per L².
          for (let axis = 0; axis < 3; axis++)
            expect(Math.abs(before[axis] - behind[axis])).toBeLessThan(0.2);
        }
      }),
      { seed: 2, numRuns: 100 },
    );
  });
});

/** Turn from a to b in a's axes, rad per body length, places one apart. */
function rate(a: Float64Array, b: Float64Array): Float64Array {
  const q = new Float64Array(4);
  const out = new Float64Array(3);
  conjugate(q, a);
  multiply(q, q, b);
  toRotationVector(out, q);
  return out.map((v) => v * (PLACES - 1));
}

test("an even bend with an even twist, a helix, is met everywhere, beyond the ends too", () => {
  const helix = (station: number) => {
    // exp of (twist 200 deg, bend 150 deg and 40 deg) per body length.
    const vector = [200 * DEG, 40 * DEG, 150 * DEG];
    const angle = Math.hypot(...vector);
    const half = 0.5 * angle * station;
    return new Float64Array([Math.cos(half), ...vector.map((v) => (v / angle) * Math.sin(half))]);
  };
  const at = through(STATIONS, STATIONS.map(helix));
  for (let place = 0; place < PLACES; place += 100)
    expect(arcBetween(at(place), helix(place / (PLACES - 1)))).toBeLessThan(1e-13);
});

test("headings on either side of south are met without a jump, and so is more than a whole turn along the body", () => {
  const at = through(
    STATIONS,
    STATIONS.map((s) => turned((170 + 500 * s) * DEG)),
  );
  for (let place = 0; place < PLACES; place += 50)
    expect(arcBetween(at(place), turned((170 + (500 * place) / (PLACES - 1)) * DEG))).toBeLessThan(1e-13);
});

test("a body rolled beyond 90 deg bends as it would level: the result does not depend on the axes of the earth", () => {
  const level = STATIONS.map((s) => turned(0.5 * Math.sin(7 * s), 0.3 * s, 0.2 * s * s));
  const rolled = level.map((q) => {
    const out = new Float64Array(4);
    multiply(out, turned(2, -1.2, 2.3), q);
    return out;
  });
  const a = through(STATIONS, level);
  const b = through(STATIONS, rolled);
  for (let place = 0; place < PLACES; place += 100) {
    const expected = new Float64Array(4);
    multiply(expected, turned(2, -1.2, 2.3), a(place));
    expect(arcBetween(b(place), expected)).toBeLessThan(1e-14);
  }
});
