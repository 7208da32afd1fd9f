import { describe, expect, test } from "vitest";
import { foldedHz, ToneFinder } from "../../bridge/numeric/tone.ts";
import { Random } from "../../bridge/rehearsal/random.ts";

const SIZE = 64;

/** Three channels of one signal, along (2, -1, 2) / 3, the oldest reading at `start`. */
function window(signal: (n: number) => number, start = 0): Float64Array {
  const readings = new Float64Array(3 * SIZE);
  for (let n = 0; n < SIZE; n++) {
    [2 / 3, -1 / 3, 2 / 3].forEach((part, channel) => {
      readings[channel * SIZE + ((start + n) % SIZE)] = 40 + part * signal(n);
    });
  }
  return readings;
}

describe("a tone", () => {
  test.each([0.1, 0.137, 0.25, 0.3333, 0.47])(
    "of %f cycles a reading is found, wherever the ring starts",
    (f) => {
      const finder = new ToneFinder(SIZE);
      const readings = window((n) => 5 * Math.sin(2 * Math.PI * f * n + 1), 17);
      expect(finder.find(readings, 17, 0.08)).toBe(true);
      // A twentieth of a line; Hann's window takes at most 15 % off between two lines.
      expect(Math.abs(finder.frequency - f)).toBeLessThan(0.05 / SIZE);
      expect(finder.amplitude).toBeGreaterThan(0.84 * 5);
      expect(finder.amplitude).toBeLessThan(1.02 * 5);
    },
  );

  test("at half the rate has what is seen of it", () => {
    const finder = new ToneFinder(SIZE);
    expect(
      finder.find(
        window((n) => (n % 2 === 0 ? 5 : -5)),
        0,
        0.08,
      ),
    ).toBe(true);
    expect(finder.frequency).toBe(0.5);
    expect(finder.amplitude).toBeCloseTo(5, 6);
  });
});

describe("no tone", () => {
  test.each([
    ["something slower than asked for", (n: number) => 30 * Math.sin(0.2 * n)],
    ["a step", (n: number) => (n < 30 ? 0 : 40)],
    ["a ramp", (n: number) => n],
    ["nothing", () => 0],
  ])("%s", (_, signal) => {
    expect(new ToneFinder(SIZE).find(window(signal), 0, 0.08)).toBe(false);
  });

  test("noise hardly ever stands out, and then faintly", () => {
    const random = Random.forStream(1, 1);
    const finder = new ToneFinder(SIZE);
    for (let k = 0; k < 300; k++) {
      const readings = Float64Array.from({ length: 3 * SIZE }, () => random.normal());
      if (finder.find(readings, 0, 0.08)) expect(finder.amplitude).toBeLessThan(1.5);
    }
  });
});

test.each([
  [50, 100, 50],
  [60, 100, 40],
  [50, 60, 10],
  [137, 100, 37],
  [200, 100, 0],
  [37, 100, 37],
])("%i Hz sampled at %i Hz looks like %i Hz", (hz, rateHz, looks) => {
  expect(foldedHz(hz, rateHz)).toBe(looks);
});
