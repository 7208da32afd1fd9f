import { expect, test } from "vitest";
import { Random } from "../../bridge/rehearsal/random.ts";

test("the generator is xoshiro128**", () => {
  const random = new Random([1, 2, 3, 4]);
  // From state 1, 2, 3, 4: the first numbers of the authors' own C code, version 1.1 (prng.di.unimi.it/xoshiro128starstar.c).
  const expected = [
    11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597, 4258142804,
  ];
  expect(expected.map(() => random.word())).toEqual(expected);
});

test("the same seed and stream give the same numbers, another of either gives others", () => {
  const draw = (seed: number, stream: number) => {
    const random = Random.forStream(seed, stream);
    return Array.from({ length: 8 }, () => random.word());
  };
  expect(draw(7, 3)).toEqual(draw(7, 3));
  expect(draw(7, 4)).not.toEqual(draw(7, 3));
  expect(draw(8, 3)).not.toEqual(draw(7, 3));
});

test("normal numbers have mean 0, variance 1 and the normal share beyond two sigma", () => {
  const random = Random.forStream(1, 0);
  const count = 100_000;
  let sum = 0;
  let squares = 0;
  let beyond = 0;
  for (let i = 0; i < count; i++) {
    const x = random.normal();
    sum += x;
    squares += x * x;
    if (Math.abs(x) > 2) beyond++;
  }
  // Four standard errors: 1/sqrt(n), sqrt(2/n), and of the share 0.0455 sqrt(p(1 - p)/n).
  expect(Math.abs(sum / count)).toBeLessThan(4 / Math.sqrt(count));
  expect(Math.abs(squares / count - 1)).toBeLessThan(4 * Math.sqrt(2 / count));
  expect(Math.abs(beyond / count - 0.0455)).toBeLessThan(4 * Math.sqrt((0.0455 * 0.9545) / count));
});
