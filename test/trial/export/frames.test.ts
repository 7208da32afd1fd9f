import { expect, test } from "vitest";
import { FrameMidlines } from "../../../bridge/trial/export/frames.ts";

interface Seen {
  timeS: number;
  edge: number;
  x: number | null;
}

/** Frames and sweeps in order of time; the midline's one number is `motion`. */
function framesOf(
  frames: readonly number[],
  sweeps: readonly number[],
  motion: (timeS: number) => number,
): Seen[] {
  const seen: Seen[] = [];
  const midlines = new FrameMidlines(100, 1, (timeS, edge, m) =>
    seen.push({ timeS, edge, x: m?.[0] ?? null }),
  );
  const events = [
    ...frames.map((timeS, edge) => ({ timeS, edge })),
    ...sweeps.map((timeS) => ({ timeS, edge: -1 })),
  ].sort((a, b) => a.timeS - b.timeS);
  for (const { timeS, edge } of events) {
    if (edge < 0) midlines.sweep(timeS, Float64Array.of(motion(timeS)));
    else midlines.sync(timeS, edge);
  }
  midlines.finish();
  return seen;
}

const evenly = (rateHz: number, from: number, to: number) =>
  Array.from({ length: Math.round((to - from) * rateHz) }, (_, i) => from + i / rateHz);

test("each frame has the midline of its own time, in order", () => {
  const motion = (timeS: number) => Math.sin(2 * Math.PI * 3 * timeS);
  const seen = framesOf(evenly(60, 0.05, 0.9), evenly(100, 0, 1), motion);
  expect(seen.map(({ edge }) => edge)).toEqual(evenly(60, 0.05, 0.9).map((_, i) => i));
  // Cubic through 10 ms steps of a 3 Hz tone: (0.19)^4 times 3/128.
  for (const { timeS, x } of seen) expect(Math.abs(x! - motion(timeS))).toBeLessThan(4e-5);
});

test("frames before the first sweep, after the last, and where sweeps were lost have none", () => {
  const sweeps = evenly(100, 0, 1).filter((timeS) => timeS < 0.5 || timeS > 0.6);
  const seen = framesOf([-0.1, 0.2, 0.55, 0.8, 0.995, 1.2], sweeps, () => 1);
  expect(seen.map(({ x }) => x === null)).toEqual([true, false, true, false, true, true]);
});

test("a trial of three sweeps has frames, and no midline at them", () => {
  expect(framesOf([0.01], [0, 0.01, 0.02], () => 1)).toEqual([{ timeS: 0.01, edge: 0, x: null }]);
});
