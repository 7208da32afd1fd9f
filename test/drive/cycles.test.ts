import { expect, test } from "vitest";
import { WholeCycles } from "../../bridge/drive/cycles.ts";
import { SampleRing } from "../../bridge/drive/sample-ring.ts";

const NONE = new Float64Array(0);

/** Cycles of a signal between -1 and 1 sampled at 100 Hz. */
function cyclesOf(
  signal: (timeS: number) => number,
  seconds: number,
  isLost = (_: number) => false,
): WholeCycles {
  const ring = new SampleRing(1, 4000);
  for (let i = 0; i < 100 * seconds; i++)
    if (!isLost(i / 100)) ring.push(i / 100, Float64Array.of(signal(i / 100)), NONE);
  const cycles = new WholeCycles();
  cycles.find(ring, 0, 0, 1);
  return cycles;
}

const tone = (hz: number) => (timeS: number) => Math.sin(2 * Math.PI * hz * timeS);

test.each([0.3, 1, 4.7])("a tone of %f Hz: four cycles, from crossing to crossing", (hz) => {
  const cycles = cyclesOf(tone(hz), 20);
  expect(cycles.count).toBe(4);
  // A straight line between two samples of a sine misses its zero by far less than a sample.
  expect(cycles.periodS).toBeCloseTo(1 / hz, 4);
  expect(cycles.endS * hz).toBeCloseTo(Math.round(cycles.endS * hz), 3);
  expect(cycles.lastStartS).toBeCloseTo(cycles.endS - 1 / hz, 4);
});

test("noise at the line makes no cycle", () => {
  const noisy = (timeS: number) => tone(1)(timeS) + 0.1 * Math.sin(2 * Math.PI * 23.7 * timeS);
  expect(cyclesOf(noisy, 10).periodS).toBeCloseTo(1, 1);
});

test("cycles before the pace changed are left out", () => {
  const faster = (timeS: number) => (timeS < 10 ? tone(1)(timeS) : tone(2)(timeS));
  const cycles = cyclesOf(faster, 11.6);
  expect(cycles.count).toBe(3);
  expect(cycles.startS).toBeCloseTo(10, 2);
});

test.each([
  ["a single cycle", () => cyclesOf(tone(1), 2.3)],
  ["a signal that has stopped", () => cyclesOf((timeS) => (timeS < 10 ? tone(1)(timeS) : 0), 11.6)],
  ["periods that differ", () => cyclesOf((timeS) => Math.sin(6 * timeS + 0.35 * timeS * timeS), 9)],
  ["a hole in the last cycle", () => cyclesOf(tone(1), 10, (timeS) => timeS > 8.6 && timeS < 8.95)],
])("none: %s", (_, find) => {
  const cycles = find();
  expect(cycles.count).toBe(0);
  expect(cycles.periodS).toBeNaN();
});
