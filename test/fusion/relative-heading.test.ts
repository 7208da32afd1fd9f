import { describe, expect, it } from "vitest";
import { DEG_PER_RAD, RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { CONDITION, TRUST } from "../../bridge/sweep.ts";
import { RehearsedChain, rms, USELESS_MAGNETOMETERS, wrapped, yawOf } from "./rehearsed-chain.ts";

const unrest = USELESS_MAGNETOMETERS;
const sigmas = ({ fusion }: RehearsedChain) => [...fusion.relativeSigma].map((sigma) => sigma * DEG_PER_RAD);

/** No gap is off by more than twice its standard deviation. */
function expectHonest(chain: RehearsedChain, errors: readonly number[]): void {
  errors.forEach((error, gap) => {
    expect(error).toBeLessThan(2 * sigmas(chain)[gap]!);
  });
}

describe("relative heading, gyroscopes wandering by up to 0.5 °/s, without magnetometers", () => {
  it.each([
    { what: "straight", swimmer: {}, seed: 1 },
    { what: "steadily bent by 15°", swimmer: { bend: 15 * RAD_PER_DEG }, seed: 2 },
  ])(
    "stays within 1° RMS over ten minutes of a body that is $what, without growing",
    ({ swimmer, seed }) => {
      const chain = new RehearsedChain({ swimmer, seed, unrest, withMag: false });
      chain.swim(20);
      const first = rms(chain.relativeErrors(60));
      chain.swim(540);
      const lastOfGaps = chain.relativeErrors(60);
      const last = rms(lastOfGaps);
      expect(last).toBeLessThan(1);
      // The wandering biases are other ones by then: a third of a degree either way is theirs (ten minutes of six seeds).
      expect(last - first).toBeLessThan(0.3);
      expectHonest(chain, lastOfGaps);
      expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.GOOD));
    },
    180_000,
  );

  it.each([
    { what: "0.6 beats a second", swimmer: { frequencyHz: 0.6 }, atMost: 1.5 },
    { what: "2.5 beats a second", swimmer: { frequencyHz: 2.5 }, atMost: 1 },
    { what: "an anguilliform wave", swimmer: { gait: "anguilliform" as const }, atMost: 1.5 },
  ])("stays within $atMost° RMS with $what", ({ swimmer, atMost }) => {
    const chain = new RehearsedChain({ swimmer, unrest, withMag: false });
    chain.swim(120);
    const errors = chain.relativeErrors(60);
    expect(rms(errors)).toBeLessThan(atMost);
    expectHonest(chain, errors);
  });

  it("drifts by degrees in one minute when headings are free: what the body holds is not there already", () => {
    const chain = new RehearsedChain({ heading: "free", unrest, withMag: false });
    chain.swim(60);
    expect(rms(chain.relativeErrors(5))).toBeGreaterThan(4);
    expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.HEADING_UNAIDED));
  });

  it("does not turn the chain as a whole: its mean heading is that of free gyroscopes", () => {
    const mean = ({ fusion }: RehearsedChain) =>
      [0, 1, 2, 3, 4, 5].reduce((sum, i) => sum + wrapped(yawOf(fusion.orientations, i) - 1.4), 0) / 6;
    const held = new RehearsedChain({ unrest });
    const free = new RehearsedChain({ unrest, heading: "free" });
    for (const chain of [held, free]) chain.swim(30);
    // Tilted sensors: a turn about the vertical changes their yaw alone, to rounding; the newest turn is not seen yet.
    expect(Math.abs(mean(held) - mean(free))).toBeLessThan(1e-3);
  });

  it("says that it sees nothing while the body is still, with a sigma that grows", () => {
    const swimmer = { changes: [{ atS: 30, overS: 2, amplitude: 0 }] };
    const still = {
      headingWander: { amplitude: 0, periodS: 37 },
      pitchWander: { amplitude: 0, periodS: 23 },
    };
    const chain = new RehearsedChain({ swimmer: { ...swimmer, ...still }, unrest });
    chain.swim(30);
    expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.GOOD));
    const moving = sigmas(chain);
    chain.swim(240);
    sigmas(chain).forEach((sigma, gap) => {
      expect(sigma).toBeGreaterThan(moving[gap]! + 3);
    });
    expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.HEADING_UNAIDED));
  });

  it("never turns a heading by more than 0.1° in a sweep, however far off it starts", () => {
    const chain = new RehearsedChain({ heading: "free", unrest });
    chain.swim(60);
    const free = chain.errorsNow();
    chain.fusion.setHeading("relative");
    let before = free;
    let fastest = 0;
    chain.swim(100, () => {
      const now = chain.errorsNow();
      for (let gap = 0; gap < now.length; gap++)
        fastest = Math.max(
          fastest,
          Math.abs(wrapped((now[gap]! - before[gap]!) * RAD_PER_DEG)) * DEG_PER_RAD,
        );
      before = now;
    });
    // 5 °/s at 100 Hz, and the errors of the gyroscopes within a beat.
    expect(fastest).toBeLessThan(0.1);
    expect(rms(chain.relativeErrors(10))).toBeLessThan(1);
  });

  it("joins the sensors on both sides of a lost one, and takes it back in without disturbing them", () => {
    const chain = new RehearsedChain({ unrest });
    // Of the fourth sensor against the second, degrees.
    const across = () => {
      const errors = chain.errorsNow();
      return DEG_PER_RAD * wrapped((errors[1]! + errors[2]!) * RAD_PER_DEG);
    };
    let fastest = 0;
    let worst = 0;
    let before = Number.NaN;
    const watch = () => {
      const now = across();
      if (!Number.isNaN(before)) fastest = Math.max(fastest, Math.abs(now - before));
      worst = Math.max(worst, Math.abs(now));
      before = now;
    };
    chain.swim(30);
    chain.swim(150, watch, (sweep) => {
      sweep.present[2] = 0;
    });
    expect([...chain.fusion.trust].map((trust) => trust === TRUST.GOOD)).toEqual([
      true,
      true,
      false,
      true,
      true,
      true,
    ]);
    expect(chain.fusion.trust[2]).toBe(TRUST.LOST);
    expect(Math.abs(across())).toBeLessThan(2 * sigmas(chain)[2]!);
    chain.swim(151, watch);
    // Of what is back nothing is known yet, and it says so; its neighbours do not mind.
    expect(chain.fusion.trust[2]).toBe(TRUST.SETTLING);
    expect([0, 1, 3, 4, 5].map((i) => chain.fusion.trust[i])).toEqual(new Array(5).fill(TRUST.GOOD));
    chain.swim(180, watch);
    expect(worst).toBeLessThan(3);
    // Within a sweep: a correction of 5 °/s at 100 Hz, and the errors of the gyroscopes within a beat.
    expect(fastest).toBeLessThan(0.1);
    expect(rms(chain.relativeErrors(10))).toBeLessThan(1);
    expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.GOOD));
  });

  it("goes on with what is left when the first sensor or the last is lost", () => {
    for (const lost of [0, 5]) {
      const chain = new RehearsedChain({ unrest });
      chain.swim(30);
      chain.swim(60, undefined, (sweep) => {
        sweep.present[lost] = 0;
      });
      expect(chain.fusion.trust[lost]).toBe(TRUST.LOST);
      for (let i = 0; i < 6; i++) if (i !== lost) expect(chain.fusion.trust[i]).toBe(TRUST.GOOD);
      chain.swim(90);
      expect(rms(chain.relativeErrors(10))).toBeLessThan(1);
      expect([...chain.fusion.trust]).toEqual(new Array(6).fill(TRUST.GOOD));
    }
  });

  it("leaves out what a clipped accelerometer says", () => {
    const chain = new RehearsedChain({ unrest });
    chain.swim(60, undefined, (sweep) => {
      const { timeS } = sweep;
      if (timeS % 0.9 > 0.2) return;
      sweep.conditions[3] = CONDITION.ACCEL_CLIPPED;
      // To and fro, so that the inclination holds: what is tested is the heading.
      sweep.raw[3 * 9 + 3]! += Math.floor(timeS / 0.9) % 2 === 0 ? 20 : -20;
    });
    expect(rms(chain.relativeErrors(10))).toBeLessThan(1);
  });
});
