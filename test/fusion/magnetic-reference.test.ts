import { describe, expect, it } from "vitest";
import { Coefficients } from "../../bridge/fusion/coefficients.ts";
import { watchField } from "../../bridge/fusion/magnetic-reference.ts";
import { DEFAULT_PARAMETERS } from "../../bridge/fusion/parameters.ts";
import { createRecord, Slot } from "../../bridge/fusion/record.ts";

const RATE_HZ = 100;

function watcher() {
  const r = createRecord(DEFAULT_PARAMETERS, 1 / RATE_HZ);
  r[Slot.FIELD_STEP] = 1 / RATE_HZ;
  const gains = new Coefficients(DEFAULT_PARAMETERS, RATE_HZ).forStep(r, Slot.FIELD_STEP);
  /** Watches a field (horizontal and upward component, µT) for some time at a low-passed angular rate. */
  const watch = (level: number, up: number, seconds: number, rate = 1) => {
    r[Slot.LEVEL_FIELD] = 0.6 * level;
    r[Slot.LEVEL_FIELD + 1] = 0.8 * level;
    r[Slot.LEVEL_FIELD + 2] = up;
    r[Slot.REST_LOW_PASS + 1] = rate;
    for (let i = 0; i < seconds * RATE_HZ; i++) watchField(r, gains, DEFAULT_PARAMETERS);
  };
  return { r, watch };
}

describe("watchField", () => {
  it("knows norm and dip of any field, the dip to 1e-5 rad", () => {
    for (let degrees = -90; degrees <= 90; degrees += 0.5) {
      const dip = (degrees * Math.PI) / 180;
      const { r, watch } = watcher();
      watch(48 * Math.cos(dip), -48 * Math.sin(dip), 0.01);
      expect(Math.abs(r[Slot.NORM_AND_DIP]! - 48)).toBeLessThan(1e-12);
      // The approximation's own bound, and what its coefficients' seven digits add.
      expect(Math.abs(r[Slot.NORM_AND_DIP + 1]! - dip)).toBeLessThan(1.2e-5);
    }
  });

  it("takes the first field for the reference after 5 s of motion in it, and not at rest", () => {
    const still = watcher();
    still.watch(18, -45, 60, 0);
    expect(still.r[Slot.REFERENCE_KNOWN]).toBe(0);
    const moving = watcher();
    moving.watch(18, -45, 4.9);
    expect(moving.r[Slot.REFERENCE_KNOWN]).toBe(0);
    moving.watch(18, -45, 0.3);
    expect(moving.r[Slot.REFERENCE_KNOWN]).toBe(1);
    expect(moving.r[Slot.DISTURBED]).toBe(0);
  });

  it.each([
    ["12 % stronger", 18 * 1.12, -45 * 1.12],
    ["12 % weaker", 18 * 0.88, -45 * 0.88],
    ["dipping 12° less", 48.5 * Math.cos((56.2 * Math.PI) / 180), -48.5 * Math.sin((56.2 * Math.PI) / 180)],
  ])("calls a field disturbed that is %s, and undisturbed half a second after it is gone", (_, level, up) => {
    const { r, watch } = watcher();
    watch(18, -45, 10);
    watch(level, up, 1);
    expect(r[Slot.DISTURBED]).toBe(1);
    watch(18, -45, 0.4);
    expect(r[Slot.DISTURBED]).toBe(1);
    watch(18, -45, 0.6);
    expect(r[Slot.DISTURBED]).toBe(0);
  });

  it("lets the reference follow a slow change", () => {
    const { r, watch } = watcher();
    watch(18, -45, 10);
    for (let share = 1; share <= 1.3; share += 0.01) watch(18 * share, -45 * share, 20);
    expect(r[Slot.DISTURBED]).toBe(0);
    expect(r[Slot.REFERENCE]! / Math.hypot(18, 45)).toBeGreaterThan(1.25);
  });
});
