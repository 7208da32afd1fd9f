import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { SilenceWatch } from "../../bridge/clock/silence.ts";

const LIMIT_MS = 300;

describe("silence", () => {
  it("begins when more than the limit has passed since the last arrival, and ends with the next", () => {
    const watch = new SilenceWatch(LIMIT_MS);
    watch.bytesArrived(1000);
    watch.hostTime(1300);
    expect(watch.silent).toBe(false);
    expect(watch.silentSinceMs).toBeNull();
    watch.hostTime(1301);
    expect(watch.silent).toBe(true);
    watch.hostTime(9000);
    expect(watch.silentSinceMs).toBe(1300);
    watch.bytesArrived(9000);
    expect(watch.silent).toBe(false);
  });

  it("is not there before the first arrival", () => {
    const watch = new SilenceWatch(LIMIT_MS);
    watch.hostTime(1e12);
    expect(watch.silent).toBe(false);
  });

  it("is measured anew after the host clock was set back", () => {
    const watch = new SilenceWatch(LIMIT_MS);
    watch.bytesArrived(100_000);
    watch.hostTime(5000);
    watch.bytesArrived(5000);
    watch.hostTime(5301);
    expect(watch.silent).toBe(true);
  });

  it("is the same with a timer asking and on replay without one", () => {
    const steps = fc.array(fc.integer({ min: 0, max: 700 }), { minLength: 1, maxLength: 50 });
    fc.assert(
      fc.property(steps, fc.integer({ min: 1, max: 90 }), (stepsMs, everyMs) => {
        expect(silences(stepsMs, everyMs)).toEqual(silences(stepsMs, null));
      }),
    );
  });
});

/** When silences began that a chunk ended; a timer asks every `timerMs`. */
function silences(stepsMs: readonly number[], timerMs: number | null): number[] {
  const watch = new SilenceWatch(LIMIT_MS);
  const began: number[] = [];
  let nowMs = 0;
  for (const stepMs of stepsMs) {
    if (timerMs !== null) for (let t = timerMs; t <= stepMs; t += timerMs) watch.hostTime(nowMs + t);
    nowMs += stepMs;
    watch.hostTime(nowMs);
    if (watch.silentSinceMs !== null) began.push(watch.silentSinceMs);
    watch.bytesArrived(nowMs);
  }
  return began;
}
