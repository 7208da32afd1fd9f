/** Laws of the hub clock, for any sweeps. */
import fc from "fast-check";
import { expect, it } from "vitest";
import { Admission, HubClock } from "../../bridge/clock/hub-clock.ts";
import { createSweep } from "../../bridge/sweep.ts";

const RATE_HZ = 200;
const INTERVAL_US = 5000;
const { NEXT, DUPLICATE, LATE } = Admission;

/** A hub that counts and ticks without fault; some sweeps are lost, in runs up to hours; jitter stays below half an interval. */
const gaps = fc.array(
  fc.record({
    lost: fc.oneof(
      { weight: 8, arbitrary: fc.constant(0) },
      { weight: 4, arbitrary: fc.integer({ min: 1, max: 199 }) },
      { weight: 2, arbitrary: fc.integer({ min: 200, max: 1_500_000 }) },
    ),
    jitterUs: fc.integer({ min: -1200, max: 1200 }),
    delayMs: fc.integer({ min: 0, max: 400 }),
  }),
  { minLength: 1, maxLength: 60 },
);

it.each([
  ["tick and sequence", true, true],
  ["tick only", true, false],
  ["sequence only", false, true],
])("%s: any sweeps of a faultless hub get their true time and their true loss", (_, hasTick, hasSequence) => {
  const starts = fc.record({
    tickUs: fc.integer({ min: 0, max: 2 ** 32 - 1 }),
    sequence: fc.integer({ min: 0, max: 2 ** 16 - 1 }),
  });
  fc.assert(
    fc.property(starts, gaps, (start, sweeps) => {
      const sweep = createSweep(1);
      const clock = new HubClock({ rateHz: RATE_HZ });
      let n = 0;
      let before = -1;
      let lost = 0;
      sweeps.forEach(({ lost: gap, jitterUs, delayMs }, i) => {
        n += i === 0 ? 0 : gap + 1;
        const sinceUs = n * INTERVAL_US + (i === 0 ? 0 : jitterUs);
        sweep.tickUs = hasTick ? (start.tickUs + sinceUs) % 2 ** 32 : -1;
        sweep.sequence = hasSequence ? (start.sequence + n) % 2 ** 16 : -1;
        sweep.hostTimeMs = sinceUs / 1000 + delayMs;
        expect(clock.admit(sweep)).toBe(NEXT);
        expect(sweep.timeS).toBe((hasTick ? sinceUs : n * INTERVAL_US) / 1e6);
        expect(sweep.timeS).toBeGreaterThan(before);
        before = sweep.timeS;
        lost += sweep.lostBefore;
      });
      expect(lost + sweeps.length).toBe(n + 1);
      expect(clock.counters).toMatchObject({ sweeps: sweeps.length, lost });
    }),
  );
});

it("never throws and never lets time stand still, whatever comes", () => {
  const anything = fc.array(
    fc.record({
      sequence: fc.integer({ min: -1, max: 2 ** 16 - 1 }),
      tickUs: fc.integer({ min: -1, max: 2 ** 32 - 1 }),
      hostTimeMs: fc.integer({ min: 0, max: 2 ** 42 }),
    }),
  );
  fc.assert(
    fc.property(anything, (packets) => {
      const sweep = createSweep(1);
      const clock = new HubClock({ rateHz: RATE_HZ });
      let before = -1;
      for (const packet of packets) {
        const admission = clock.admit(Object.assign(sweep, packet));
        if (admission === DUPLICATE || admission === LATE) continue;
        expect(sweep.timeS).toBeGreaterThan(before);
        expect(sweep.stepS).toBeGreaterThan(0);
        expect(sweep.lostBefore).toBeGreaterThanOrEqual(0);
        before = sweep.timeS;
      }
    }),
  );
});
