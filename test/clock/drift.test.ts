import { describe, expect, it } from "vitest";
import { DriftMeter } from "../../bridge/clock/drift.ts";

const EPOCH_MS = 1_700_000_000_000;

/** A seeded generator (Park & Miller 1988), so that a failure repeats. */
function random(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state * 48_271) % 2_147_483_647;
    return state / 2_147_483_647;
  };
}

/** Arrivals of a hub at 200 Hz whose clock is fast by `ppm`: bunched, delayed, stamped to the millisecond. */
function arrivals(meter: DriftMeter, ppm: number, fromS: number, toS: number, shiftMs = 0): void {
  const next = random(17);
  for (let n = fromS * 200; n < toS * 200; n++) {
    const hubS = n / 200;
    // USB polls every few ms; one arrival in 50 waits for a busy host.
    const delayMs = 1 + 8 * next() + (next() < 0.02 ? 300 * next() : 0);
    meter.observe(hubS, Math.floor(EPOCH_MS + shiftMs + (hubS * 1000) / (1 + ppm * 1e-6) + delayMs));
  }
}

describe("drift of the hub's clock against the host's", () => {
  it("is unknown for the first minute", () => {
    const meter = new DriftMeter();
    arrivals(meter, 50, 0, 59);
    expect(meter.ppm).toBeNull();
  });

  // Ten minutes of whole-millisecond stamps: 1 ms / 600 s = 1.7 ppm.
  it.each([-80, 0, 35, 120])(
    "comes out at %s ppm within 2 ppm after ten minutes of delayed arrivals",
    (ppm) => {
      const meter = new DriftMeter();
      arrivals(meter, ppm, 0, 600);
      expect(Math.abs(meter.ppm! - ppm)).toBeLessThanOrEqual(2);
    },
  );

  it("forgets what is older than ten minutes", () => {
    const meter = new DriftMeter();
    arrivals(meter, 200, 0, 700);
    arrivals(meter, 20, 700, 1400, (700 * 1000 * (20 - 200)) / 1e6);
    expect(Math.abs(meter.ppm! - 20)).toBeLessThanOrEqual(2);
  });

  it("starts over when the host clock is set", () => {
    const meter = new DriftMeter();
    arrivals(meter, 20, 0, 300);
    arrivals(meter, 20, 300, 320, 5000);
    expect(meter.ppm).toBeNull();
    arrivals(meter, 20, 320, 920, 5000);
    expect(Math.abs(meter.ppm! - 20)).toBeLessThanOrEqual(2);
  });
});
