import { expect, test } from "vitest";
import { createGaitCycle } from "../../bridge/wave/gait-cycle.ts";
import { SteadyBout } from "../../bridge/wave/steady-bout.ts";
import { DOUBT } from "../../bridge/wire/gait.ts";

let timeS = 0;

/** A cycle of one second, since only its frequency and amplitude count. */
function cycle(frequencyHz: number, tailAmplitudeM = 0.1, doubt = 0) {
  const made = createGaitCycle(2);
  made.startS = timeS;
  made.endS = ++timeS;
  made.numbers.frequencyHz = frequencyHz;
  made.numbers.tailAmplitudeM = tailAmplitudeM;
  made.doubts.tailAmplitudeM = doubt;
  return made;
}

const newBout = () => new SteadyBout({ frequencyShare: 0.05, amplitudeShare: 0.1, cycles: 3 });

test("cycles that agree add up, and from the third on the bout is steady", () => {
  const bout = newBout();
  const steady = [1, 1.02, 0.99, 1.01].map((frequency) => {
    expect(bout.add(cycle(frequency))).toBeNull();
    return bout.steady;
  });
  expect(bout.cycles).toBe(4);
  expect(steady).toEqual([false, false, true, true]);
});

test("a cycle off in frequency ends the bout, which is told with its means, and starts a new one", () => {
  const bout = newBout();
  const startS = timeS;
  for (const frequency of [1, 1.01, 1.02]) bout.add(cycle(frequency));
  const ended = bout.add(cycle(1.2))!;
  expect(ended).toMatchObject({ startS, endS: startS + 3, cycles: 3 });
  expect(ended.numbers.frequencyHz.mean).toBeCloseTo(1.01, 12);
  expect(ended.numbers.frequencyHz.deviation).toBeCloseTo(0.01, 12);
  expect(bout.cycles).toBe(1);
  bout.add(cycle(1.2));
  expect(bout.cycles).toBe(2);
});

test("a cycle off in amplitude starts a new bout, one within a tenth does not", () => {
  const bout = newBout();
  for (const amplitude of [0.1, 0.1, 0.1, 0.108]) bout.add(cycle(1, amplitude));
  expect(bout.cycles).toBe(4);
  bout.add(cycle(1, 0.13));
  expect(bout.cycles).toBe(1);
});

test("too short a bout is not told of", () => {
  const bout = newBout();
  bout.add(cycle(1));
  bout.add(cycle(1));
  expect(bout.add(cycle(2))).toBeNull();
  expect(bout.end()).toBeNull();
});

test("doubted numbers are left out of the means", () => {
  const bout = newBout();
  for (const amplitude of [0.1, 0.1, 0.1]) bout.add(cycle(1, amplitude));
  bout.add(cycle(1, 0.108, DOUBT.CLIPPED));
  const ended = bout.end()!;
  expect(ended.cycles).toBe(4);
  expect(ended.numbers.tailAmplitudeM.count).toBe(3);
  expect(ended.numbers.tailAmplitudeM.mean).toBeCloseTo(0.1, 12);
});

test("after a stop the count starts anew", () => {
  const bout = newBout();
  bout.add(cycle(1));
  bout.end();
  expect(bout.cycles).toBe(0);
  bout.add(cycle(3, 0.4));
  expect(bout.cycles).toBe(1);
});
