/** Rehearsed swimmers whose tailbeat is beyond their gyroscopes' range, with the truth beside them. */
import { describe, expect, it } from "vitest";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { TRUST } from "../../bridge/sweep.ts";
import { type ChainOptions, RehearsedChain, rms, wrapped } from "./rehearsed-chain.ts";

/** The last two of the six sensors, near the tail: they are the ones that are clipped. */
const TAIL = [4, 5];
const SPRINT_S = 20;
const PATIENCE_MS = 120_000;

/** Swims steadily, then, from SPRINT_S on, at four beats a second: the tail's rates reach 860 °/s. */
function sprint(options: ChainOptions) {
  const chain = new RehearsedChain({
    ...options,
    gyroRange: 500 * RAD_PER_DEG,
    swimmer: { changes: [{ atS: SPRINT_S, overS: 1, frequencyHz: 4 }] },
  });
  chain.swim(SPRINT_S);
  // Without magnetometers headings have no north: errors are changes since the sprint began.
  const north = options.withMag === false;
  const before = TAIL.map((sensor) => (north ? chain.errorOf(sensor).heading : 0));
  const errors: { heading: number; inclination: number; headingRatio: number; inclinationRatio: number }[] =
    [];
  const trust = new Set<number>();
  let clippedTrusted = 0;
  chain.swim(SPRINT_S + 10, () => {
    TAIL.forEach((sensor, i) => {
      const error = chain.errorOf(sensor);
      const heading = wrapped(error.heading - before[i]!);
      errors.push({
        heading: heading * DEG_PER_RAD,
        inclination: error.inclination * DEG_PER_RAD,
        headingRatio: heading / chain.fusion.headingSigma[sensor]!,
        inclinationRatio: error.inclination / chain.fusion.inclinationSigma[sensor]!,
      });
      trust.add(chain.fusion.trust[sensor]!);
      if (chain.isClipped(sensor) && chain.fusion.trust[sensor] !== TRUST.CLIPPED) clippedTrusted++;
    });
  });
  return {
    headingDeg: rms(errors.map((e) => e.heading)),
    inclinationDeg: rms(errors.map((e) => e.inclination)),
    headingRatio: rms(errors.map((e) => e.headingRatio)),
    inclinationRatio: rms(errors.map((e) => e.inclinationRatio)),
    trust,
    clippedTrusted,
  };
}

describe("a tailbeat beyond the gyroscope's range", () => {
  it.each([
    // Measured when written, of what is left where nothing is made good: heading 0.69 and 0.58, inclination 0.78 and 0.46.
    ["nine-axis", "magnetic", true, 0.75, 0.85, TRUST.GOOD],
    ["six-axis", "free", false, 0.65, 0.55, TRUST.HEADING_UNAIDED],
  ] as const)(
    "of %s sensors is made good, its uncertainty is stated truly, and trust says so",
    (_, heading, withMag, headingFactor, inclinationFactor, otherwise) => {
      const made = sprint({ heading, withMag });
      const not = sprint({ heading, withMag, rangeKnown: false });
      expect(made.headingDeg).toBeLessThan(headingFactor * not.headingDeg);
      expect(made.inclinationDeg).toBeLessThan(inclinationFactor * not.inclinationDeg);
      for (const ratio of [made.headingRatio, made.inclinationRatio]) {
        expect(ratio).toBeGreaterThan(0.5);
        expect(ratio).toBeLessThan(1.5);
      }
      expect(made.clippedTrusted).toBe(0);
      expect([...made.trust].sort()).toEqual([TRUST.CLIPPED, otherwise].sort());
    },
    PATIENCE_MS,
  );
});

describe("losses of 12 readings at a time", () => {
  it.each([
    ["at two beats a second", 2],
    ["at three beats a second", 3],
  ])(
    "%s leave an uncertainty that is stated truly, and predictions that are marked",
    (_, frequencyHz) => {
      // What the steady deviations stand for: a field that is not quite even, accelerometers nearly calibrated.
      const chain = new RehearsedChain({
        heading: "magnetic",
        swimmer: { frequencyHz },
        unrest: { fieldUT: 1 },
        accelBiasMilliG: 10,
      });
      const isLost = () => chain.timeS > 15 && Math.round(100 * chain.timeS) % 137 < 12;
      const ratios = { heading: [] as number[], inclination: [] as number[] };
      chain.swim(
        40,
        () => {
          if (chain.timeS < 10) return;
          for (let sensor = 0; sensor < 6; sensor++) {
            const { heading, inclination } = chain.errorOf(sensor);
            ratios.heading.push(heading / chain.fusion.headingSigma[sensor]!);
            ratios.inclination.push(inclination / chain.fusion.inclinationSigma[sensor]!);
            expect(chain.fusion.trust[sensor] === TRUST.BRIDGED).toBe(isLost());
          }
        },
        (sweep) => {
          if (isLost()) sweep.present.fill(0);
        },
      );
      for (const ratio of [rms(ratios.heading), rms(ratios.inclination)]) {
        expect(ratio).toBeGreaterThan(0.5);
        expect(ratio).toBeLessThan(1.5);
      }
    },
    PATIENCE_MS,
  );
});
