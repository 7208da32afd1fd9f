import { expect, test } from "vitest";
import type { GaitName } from "../../bridge/numeric/gaits.ts";
import { multiply, rotate } from "../../bridge/numeric/quaternion.ts";
import { STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { newKinematics, Swimmer } from "../../bridge/rehearsal/swimmer.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";

const LENGTH_M = 0.8;
const STATIONS = [0, 0.2, 0.5, 0.9, 1];
/** Everything at once: both changes of pace, a turn, wandering fast enough to matter. */
const BUSY: SwimmerOptions = {
  ...STEADY_SWIMMER,
  frequencyHz: 1.4,
  restS: 1,
  changes: [{ atS: 5, overS: 1, frequencyHz: 2.2, amplitude: 0.8 }],
  turns: [{ atS: 4, overS: 2, by: 1.2 }],
  headingWander: { amplitude: 0.1, periodS: 5 },
  pitchWander: { amplitude: 0.3, periodS: 3 },
  rollWander: { amplitude: 0.4, periodS: 4 },
};

const swimmerOf = (options: Partial<SwimmerOptions> = {}) => new Swimmer(LENGTH_M, { ...BUSY, ...options });

function at(swimmer: Swimmer, timeS: number, station: number) {
  const out = newKinematics();
  swimmer.kinematics(timeS, swimmer.place(station), out);
  return out;
}

test("a body at rest feels gravity upwards and does not turn", () => {
  const swimmer = swimmerOf();
  for (const station of STATIONS) {
    const { specificForce, angularVelocity, orientation } = at(swimmer, 0.5, station);
    const earth = new Float64Array(3);
    rotate(earth, orientation, specificForce);
    [0, 0, STANDARD_GRAVITY].forEach((v, axis) => {
      expect(earth[axis]).toBeCloseTo(v, 12);
      expect(Math.abs(angularVelocity[axis])).toBeLessThan(1e-15);
    });
  }
});

test.each<GaitName>(["carangiform", "anguilliform"])(
  "lateral positions of a %s body follow its published envelope",
  (gait) => {
    const swimmer = swimmerOf({ gait, turns: [], changes: [], restS: 1, startS: 1 });
    const motion = {
      behind: { value: 0, rate: 0, acceleration: 0 },
      lateral: { value: 0, rate: 0, acceleration: 0 },
      angle: { value: 0, rate: 0, acceleration: 0 },
    };
    for (const x of [0, 0.25, 0.5, 0.75, 1]) {
      const place = swimmer.place(x);
      let reach = 0;
      for (let t = 3; t < 3 + 1 / 1.4; t += 1e-4) {
        swimmer.planeMotion(t, place, motion);
        reach = Math.max(reach, Math.abs(motion.lateral.value));
      }
      const published = gait === "carangiform" ? 0.02 - 0.08 * x + 0.16 * x * x : 0.089 * Math.exp(x - 1);
      // Steps of 1e-4 s miss a crest by at most (2 pi 1.4 x 5e-5)² / 2 = 1e-7 of it.
      expect(Math.abs(reach / (published * LENGTH_M) - 1)).toBeLessThan(1e-6);
    }
  },
);

/** Straight under its wave, and steadily bent to the left. */
const BENDS = [0, 0.4];

test.each(BENDS)("a body bent by %d rad keeps its length at every moment", (bend) => {
  const swimmer = swimmerOf({ bend });
  const count = 2001;
  const places = Array.from({ length: count }, (_, i) => swimmer.place(i / (count - 1)));
  const midline = new Float64Array(3 * count);
  for (const timeS of [0, 2.1, 4.7, 5.4, 9.9]) {
    swimmer.midline(timeS, places, midline);
    let length = 0;
    for (let i = 3; i < midline.length; i += 3) {
      length += Math.hypot(
        midline[i] - midline[i - 3],
        midline[i + 1] - midline[i - 2],
        midline[i + 2] - midline[i - 1],
      );
    }
    // Chords of a bend of up to 8 rad/m: short by (0.4 mm x 8 rad/m)² / 24 = 4e-7.
    expect(Math.abs(length / LENGTH_M - 1)).toBeLessThan(1e-6);
    expect(length).toBeLessThanOrEqual(LENGTH_M * (1 + 1e-12));
  }
});

test("a still body with a steady bend is an arc of a circle", () => {
  const bend = 0.4;
  const swimmer = swimmerOf({ bend, heading: 0 });
  const midline = new Float64Array(6);
  swimmer.midline(0.5, [swimmer.place(0), swimmer.place(1)], midline);
  // The chord of an arc of length L that turns by b is L sin(b/2) / (b/2); by symmetry it lies along the travel axis.
  expect(midline[3]).toBeCloseTo((-LENGTH_M * Math.sin(bend / 2)) / (bend / 2), 12);
  expect(Math.abs(midline[4])).toBeLessThan(1e-12);
  const yaw = (station: number) => {
    const q = at(swimmer, 0.5, station).orientation;
    return 2 * Math.atan2(q[3], q[0]);
  };
  expect(yaw(0) - yaw(1)).toBeCloseTo(bend, 12);
});

test.each(BENDS)("angular velocity is the derivative of the orientation, bent by %d rad", (bend) => {
  const swimmer = swimmerOf({ bend });
  const h = 1e-5;
  for (const station of STATIONS) {
    for (let t = 1.1; t < 8; t += 0.31) {
      const before = at(swimmer, t - h, station).orientation;
      const after = at(swimmer, t + h, station).orientation;
      const inverse = before.map((v, i) => (i === 0 ? v : -v));
      const turn = new Float64Array(4);
      multiply(turn, inverse, after);
      const { angularVelocity } = at(swimmer, t, station);
      for (let axis = 0; axis < 3; axis++) {
        // Central difference: h²/6 x third derivative (1e4 rad/s³) = 2e-7, rounding 1e-16 / h = 1e-11.
        expect(Math.abs((2 * turn[axis + 1]) / (2 * h) - angularVelocity[axis])).toBeLessThan(1e-6);
      }
    }
  }
});

test.each(BENDS)("specific force is the acceleration of the place, less gravity, bent by %d rad", (bend) => {
  const swimmer = swimmerOf({ bend });
  const h = 1e-3;
  for (const station of STATIONS) {
    for (let t = 1.1; t < 8; t += 0.31) {
      const [a, b, c, d, e] = [-2, -1, 0, 1, 2].map((i) => at(swimmer, t + i * h, station));
      const felt = new Float64Array(3);
      rotate(felt, c.orientation, c.specificForce);
      for (let axis = 0; axis < 3; axis++) {
        const p = [a, b, c, d, e].map((k) => k.position[axis]);
        const acceleration = (-p[0] + 16 * p[1] - 30 * p[2] + 16 * p[3] - p[4]) / (12 * h * h);
        const gravity = axis === 2 ? STANDARD_GRAVITY : 0;
        // Five-point stencil: h⁴/90 x sixth derivative (some 1e6 m/s⁶) = 1e-8 to 1e-7, rounding 1e-16 / h² = 1e-10.
        expect(Math.abs(felt[axis] - acceleration - gravity)).toBeLessThan(1e-5);
      }
    }
  }
});

test("angular velocity, integrated over five seconds of everything at once, gives the orientation", () => {
  const swimmer = swimmerOf();
  const place = swimmer.place(0.9);
  const out = newKinematics();
  const rateAt = (t: number) => {
    swimmer.kinematics(t, place, out);
    return out.angularVelocity.slice();
  };
  const derivative = (q: Float64Array, w: Float64Array) => {
    const dq = new Float64Array(4);
    multiply(dq, q, Float64Array.of(0, ...w));
    return dq.map((v) => v / 2);
  };
  const plus = (q: Float64Array, dq: Float64Array, by: number) => q.map((v, i) => v + by * dq[i]);
  const h = 2e-3;
  let q = at(swimmer, 3, 0.9).orientation.slice();
  for (let i = 0; i < 2500; i++) {
    const t = 3 + i * h;
    const [w0, w1, w2] = [rateAt(t), rateAt(t + h / 2), rateAt(t + h)];
    const k1 = derivative(q, w0);
    const k2 = derivative(plus(q, k1, h / 2), w1);
    const k3 = derivative(plus(q, k2, h / 2), w1);
    const k4 = derivative(plus(q, k3, h), w2);
    q = q.map((v, c) => v + (h / 6) * (k1[c] + 2 * k2[c] + 2 * k3[c] + k4[c]));
  }
  const truth = at(swimmer, 8, 0.9).orientation;
  const dot = Math.abs(q.reduce((sum, v, i) => sum + v * truth[i], 0));
  // Runge-Kutta's own error at 2 ms is near 1e-9 rad a step's fourth power; 1e-6 rad is the promise.
  expect(2 * Math.acos(Math.min(1, dot / Math.hypot(...q)))).toBeLessThan(1e-6);
});

test("a body that would fold over is refused, with the most that can be", () => {
  expect(() => swimmerOf({ amplitude: 3 })).toThrow(/COMMAND_INVALID[\s\S]*expected 0 to 1\.3/);
  expect(() => swimmerOf({ changes: [{ atS: 6, overS: 1, amplitude: 2 }] })).toThrow(/COMMAND_INVALID/);
});
