import { describe, expect, it } from "vitest";
import { SixPositions } from "../../bridge/calibration/six-positions.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { attitude, Handled, place, UNIT } from "./handled.ts";

const GRAVITY = 9.8146;
/** Pitch and roll that put x, y and z up and down. */
const FACES = [
  [90, 0],
  [-90, 0],
  [0, 90],
  [0, -90],
  [0, 0],
  [0, 180],
] as const;

function turned(seed: number, faces: readonly (readonly [number, number])[], awry = 12) {
  const random = Random.forStream(seed, 50);
  const scale = [0, 1, 2].map(() => random.between(0.98, 1.02));
  const truth = [place({ calibration: { accelBiasMPerS2: [0.2, -0.3, 0.1], accelScale: scale } })];
  const procedure = new SixPositions([place()], [UNIT], 100, GRAVITY);
  const handled = new Handled(truth, procedure, { seed, gravity: GRAVITY });
  for (const [pitch, roll] of faces) {
    const off = () => random.between(-awry, awry);
    handled
      .turn(1, () => [2, 1, 1])
      .hold(attitude(random.between(-180, 180), pitch + off(), roll + off()), 3.5);
  }
  return { procedure, scale, bias: [...handled.units[0]!.accel.bias] };
}

describe("Six positions, held askew by up to 12°", () => {
  it.each([1, 2, 3, 4, 5])("give bias to 0.02 m/s² and scale to 0.2 %% (seed %i)", (seed) => {
    const { procedure, scale, bias } = turned(seed, FACES);
    const [outcome] = procedure.result();
    if (!outcome!.ok) throw new Error(outcome!.reason);
    const { accelBiasMPerS2, accelScale, sigmaBiasMPerS2, sigmaScale } = outcome!.numbers;
    for (let k = 0; k < 3; k++) {
      expect(Math.abs(accelBiasMPerS2[k]! - bias[k]!)).toBeLessThan(0.02);
      expect(Math.abs(accelScale[k]! / scale[k]! - 1)).toBeLessThan(0.002);
    }
    expect(sigmaBiasMPerS2).toBeLessThan(0.01);
    expect(sigmaScale).toBeLessThan(0.001);
    expect(procedure.progress().share).toBe(1);
  });
});

it("any poses will do, as long as there are enough", () => {
  const random = Random.forStream(9, 9);
  const anyhow = Array.from(
    { length: 14 },
    () => [random.between(-80, 80), random.between(-180, 180)] as const,
  );
  const { procedure, bias } = turned(6, anyhow);
  const [outcome] = procedure.result();
  if (!outcome!.ok) throw new Error(outcome!.reason);
  outcome!.numbers.accelBiasMPerS2.forEach((value, k) => {
    expect(Math.abs(value - bias[k]!)).toBeLessThan(0.02);
  });
});

it("says which sides are missing", () => {
  const { procedure } = turned(7, FACES.slice(0, 4));
  expect(procedure.progress().text).toMatch(/missing: z up, z down\.$/);
  expect(procedure.result()[0]).toMatchObject({
    ok: false,
    reason: "4 still poses, 6 are needed; missing: z up, z down",
  });
});

it("six poses on one side are refused: they lie too close to each other", () => {
  const near = [0, 60, 120, 180, 240, 300].map(
    (angle) => [25 * Math.cos((angle * Math.PI) / 180), 25 * Math.sin((angle * Math.PI) / 180)] as const,
  );
  const { procedure } = turned(8, near, 0);
  expect(procedure.result()[0]).toMatchObject({
    ok: false,
    reason: expect.stringMatching(/missing: .*z down/),
  });
});
