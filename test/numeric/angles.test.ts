import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { toAngles } from "../../bridge/numeric/angles.ts";
import { multiply, rotate } from "../../bridge/numeric/quaternion.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";

const HALF = Math.SQRT1_2;

function anglesDeg(q: readonly number[]): number[] {
  const out = [0, 0, 0];
  toAngles(out, q);
  return out.map((angle) => angle * DEG_PER_RAD);
}

/** Turn by `deg` about axis 0, 1 or 2. */
function turn(axis: 0 | 1 | 2, deg: number): number[] {
  const q = [Math.cos((deg / 2) * RAD_PER_DEG), 0, 0, 0];
  q[axis + 1] = Math.sin((deg / 2) * RAD_PER_DEG);
  return q;
}

/** Yaw, then pitch nose-up (a turn about y the other way), then roll. */
function compose(yawDeg: number, pitchDeg: number, rollDeg: number): number[] {
  const q = turn(2, yawDeg);
  multiply(q, q, turn(1, -pitchDeg));
  multiply(q, q, turn(0, rollDeg));
  return q;
}

describe("by hand", () => {
  test.each([
    ["level, nose to the east", [1, 0, 0, 0], [0, 0, 0]],
    ["nose to the north: a left turn by 90 degrees", [HALF, 0, 0, HALF], [90, 0, 0]],
    ["nose to the south", [HALF, 0, 0, -HALF], [-90, 0, 0]],
    ["nose up by 60 degrees", [Math.sqrt(3) / 2, 0, -0.5, 0], [0, 60, 0]],
    ["right side down by 90 degrees", [HALF, HALF, 0, 0], [0, 0, 90]],
    ["upside down, nose to the east", [0, 1, 0, 0], [0, 0, 180]],
  ])("%s", (_, q, expected) => {
    anglesDeg(q).forEach((angle, i) => {
      expect(angle).toBeCloseTo(expected[i]!, 10);
    });
  });

  test("right side down means that the body's left points up", () => {
    const left = [0, 1, 0];
    rotate(left, turn(0, 30), left);
    expect(left[2]).toBeCloseTo(0.5, 12);
    expect(anglesDeg(turn(0, 30))[2]).toBeCloseTo(30, 10);
  });

  test("the nose's elevation is the pitch whatever yaw and roll are", () => {
    const nose = [1, 0, 0];
    const q = compose(70, 25, -110);
    rotate(nose, q, nose);
    expect(Math.asin(nose[2]!) * DEG_PER_RAD).toBeCloseTo(25, 10);
    expect(anglesDeg(q)[1]).toBeCloseTo(25, 10);
  });
});

test("gives back the yaw, pitch and roll an orientation was made of", () => {
  const angle = (limit: number): fc.Arbitrary<number> => fc.double({ min: -limit, max: limit, noNaN: true });
  fc.assert(
    fc.property(angle(179.9), angle(89.9), angle(179.9), (yawDeg, pitchDeg, rollDeg) => {
      const [yaw, pitch, roll] = anglesDeg(compose(yawDeg, pitchDeg, rollDeg));
      // Rounding of a double (1e-16) is stretched by 1 / cos(89.9°) = 573 and by 57 degrees a radian: below 1e-10.
      expect(yaw).toBeCloseTo(yawDeg, 9);
      expect(pitch).toBeCloseTo(pitchDeg, 9);
      expect(roll).toBeCloseTo(rollDeg, 9);
    }),
    { seed: 8855 },
  );
});

test.each([
  [90, 40, 0],
  [-90, 40, 0],
  [90, 40, 30],
  [-90, -100, 25],
])("with the nose at %d degrees the turn about the vertical is all yaw", (pitchDeg, yawDeg, rollDeg) => {
  const q = compose(yawDeg, pitchDeg, rollDeg);
  const [yaw, pitch, roll] = anglesDeg(q);
  expect(pitch).toBeCloseTo(pitchDeg, 6);
  expect(roll).toBe(0);
  // The same orientation, made of the angles found: same quaternion up to its sign. The pitch is exact to 1e-8 only.
  const again = compose(yaw!, pitch!, roll!);
  const alike = again.reduce((sum, part, i) => sum + part * q[i]!, 0);
  expect(Math.abs(alike)).toBeCloseTo(1, 10);
});
