import { expect, test } from "vitest";
import { SteadyBout } from "../../bridge/wave/steady-bout.ts";

test("beats that agree add up", () => {
  const bout = new SteadyBout();
  for (const frequency of [1, 1.02, 0.99, 1.01]) bout.add(frequency, 0.1);
  expect(bout.beats).toBe(4);
});

test("a beat off in frequency starts a new bout", () => {
  const bout = new SteadyBout();
  for (const frequency of [1, 1, 1, 1.2]) bout.add(frequency, 0.1);
  expect(bout.beats).toBe(1);
  bout.add(1.2, 0.1);
  expect(bout.beats).toBe(2);
});

test("a beat off in amplitude starts a new bout, one within a tenth does not", () => {
  const bout = new SteadyBout();
  for (const amplitude of [0.1, 0.1, 0.1, 0.108]) bout.add(1, amplitude);
  expect(bout.beats).toBe(4);
  bout.add(1, 0.13);
  expect(bout.beats).toBe(1);
});

test("after a stop the count starts anew", () => {
  const bout = new SteadyBout();
  bout.add(1, 0.1);
  bout.end();
  expect(bout.beats).toBe(0);
  bout.add(3, 0.4);
  expect(bout.beats).toBe(1);
});
