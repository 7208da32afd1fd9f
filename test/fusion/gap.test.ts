/** What lost samples leave uncertain, and how soon that is made good: in calm and in violent motion. */
import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { ACCEL, HAS_INERTIAL, HAS_MAG, TRUST } from "../../bridge/sweep.ts";
import { fillRow, inclinationError, oneSensor, RATE_HZ, toBody, turned } from "./motion.ts";

const START_S = 25;
/** When readings begin to be lost. */
const LOST_S = START_S + 2;
/** A pitch that rocks twice a second from START_S on. */
const pitch = (t: number) => (t < START_S ? 0 : 0.3 * (1 - Math.cos(4 * Math.PI * (t - START_S))));

interface Moment {
  readonly errorDeg: number;
  readonly trust: number;
}

/**
 * A sensor rocks, sways to the side with an amplitude (m/s²), and loses its readings from LOST_S on.
 * @returns what holds after each sweep
 */
function rock(lostS: number, sway: number, heading: "magnetic" | "free" = "free"): Moment[] {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading });
  const sweep = oneSensor();
  return Array.from({ length: (LOST_S + 10) * RATE_HZ }, (_, i) => {
    const t = i / RATE_HZ;
    const middle = turned([0, pitch(t - 0.5 / RATE_HZ), 0]);
    const rate = (pitch(t) - pitch(t - 1 / RATE_HZ)) * RATE_HZ;
    fillRow(sweep, 0, middle, [0, rate, 0]);
    const swayed = toBody(middle, [0, t < START_S ? 0 : sway * Math.sin(4.4 * Math.PI * t), 0]);
    for (let axis = 0; axis < 3; axis++) sweep.values[ACCEL + axis]! += swayed[axis]!;
    sweep.present[0] = t > LOST_S && t <= LOST_S + lostS ? 0 : HAS_INERTIAL | HAS_MAG;
    sweep.timeS = t;
    fusion.step(sweep);
    return {
      errorDeg: inclinationError(fusion, turned([0, pitch(t), 0])) * DEG_PER_RAD,
      trust: fusion.trust[0]!,
    };
  });
}

/** What held `t` seconds after the loss began. */
const at = (moments: readonly Moment[], t: number) => moments[Math.round((LOST_S + t) * RATE_HZ)]!;

/** The heading takes longest: once its variance is what the field's time constant leaves. */
const SETTLED_S = 9.5;

describe("the inclination after lost samples", () => {
  it("heals quickly where the body hardly accelerates: a sixth is left after half a second", () => {
    const moments = rock(0.3, 0);
    const after = at(moments, 0.33).errorDeg;
    expect(after).toBeGreaterThan(10);
    // At the time constant of 3 s, nine tenths would be.
    expect(at(moments, 0.83).errorDeg).toBeLessThan(after / 6);
    expect(at(moments, 3.5).errorDeg).toBeLessThan(0.5);
  });

  it.each([0.06, 0.1])("is left alone after %f s where the body sways with 15 m/s²", (lostS) => {
    const without = rock(0, 15);
    const lost = rock(lostS, 15);
    // A gap of less than a quarter beat is filled in to a tenth of a degree; so the average must not be given up for it.
    for (const t of [0.2, 0.5, 1, 2, 3])
      expect(Math.abs(at(lost, t).errorDeg - at(without, t).errorDeg)).toBeLessThan(0.3);
  });
});

describe("trust", () => {
  it("says bridged while readings are lost, settling until the inclination has healed, then what it said before", () => {
    const moments = rock(0.3, 0, "magnetic");
    const usual = at(moments, -0.1).trust;
    expect(at(moments, 0.2).trust).toBe(TRUST.BRIDGED);
    expect(usual).toBe(TRUST.GOOD);
    expect(at(moments, 0.34).trust).toBe(TRUST.SETTLING);
    expect(at(moments, 0.3 + SETTLED_S).trust).toBe(usual);
  });
});
