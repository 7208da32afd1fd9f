import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type BodyPose, LEVEL } from "../../bridge/calibration/body-pose.ts";
import { mountingAngles } from "../../bridge/calibration/calibration.ts";
import { Mounting, type MountingNumbers, type MountingOptions } from "../../bridge/calibration/mounting.ts";
import type { Outcome } from "../../bridge/calibration/procedure.ts";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { EARTH_FIELD_UT, SimulatedRig } from "../../bridge/rehearsal/simulated-rig.ts";
import { STEADY_SWIMMER, type SwimmerOptions } from "../../bridge/rehearsal/swimmer-options.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { anyMounting, attitude, between, Handled, place, quaternionOf, SIX_AXIS, UNIT } from "./handled.ts";

const ON_ITS_LEFT: BodyPose = { pitch: 0, roll: -Math.PI / 2 };

/** Sensors mounted any way; the procedure is not told how. */
function mounted(count: number, seed: number, options: Partial<MountingOptions> = {}, calibrated = false) {
  const random = Random.forStream(seed, 77);
  const truth = Array.from({ length: count }, (_, k) => place({ mounting: anyMounting(random) }, k));
  const model = calibrated ? { ...UNIT, accel: { ...UNIT.accel, biasMilliG: 2 } } : UNIT;
  const mounting = new Mounting({
    sensors: truth.map((_, k) => place({}, k)),
    models: truth.map(() => model),
    rateHz: 100,
    lengthM: 1,
    poses: [LEVEL],
    bend: false,
    bearing: null,
    ...options,
  });
  return { truth, mounting, handled: new Handled(truth, mounting, { seed, model }) };
}

function numbers(outcome: Outcome<MountingNumbers>): MountingNumbers {
  if (!outcome.ok) throw new Error(outcome.reason);
  return outcome.numbers;
}

function swimAndFind(rigName: string, seed: number, swimmer: Partial<SwimmerOptions>) {
  const rig = loadRig(rigName);
  const random = Random.forStream(seed, 77);
  const truth = rig.sensors.map((sensor) => ({ ...sensor, mounting: anyMounting(random) }));
  const simulated = new SimulatedRig({
    rig: { ...rig, sensors: truth },
    seed,
    faults: [],
    swimmer: { ...STEADY_SWIMMER, restS: 4, ...swimmer },
    earthFieldUT: EARTH_FIELD_UT,
  });
  const { rateHz } = rig.hub;
  const mounting = new Mounting({
    sensors: rig.sensors,
    models: rig.models,
    rateHz,
    lengthM: rig.body.lengthMm / 1000,
    poses: [LEVEL],
    bend: true,
    bearing: null,
  });
  for (let k = 0; mounting.progress().share < 1; k++) {
    const sweep = simulated.sweep(k);
    sweep.timeS = k / rateHz;
    sweep.stepS = 1 / rateHz;
    mounting.observe(sweep);
  }
  return mounting.result().map((outcome, i) => {
    const found = numbers(outcome);
    return { off: between(found, truth[i]!.mounting), sigma: found.sigmaDeg };
  });
}

describe("A straight pose and a bend", () => {
  // Accelerometer biases as the data sheet allows them, 20 mg, and not calibrated.
  it.each([
    ["ribbon-foil", 1, { gait: "carangiform" }],
    ["ribbon-foil", 2, { gait: "carangiform", frequencyHz: 1.8 }],
    ["ribbon-foil", 3, { gait: "anguilliform" }],
    ["long-dummy", 1, { gait: "carangiform" }],
  ] as const)("find mountings of any kind to half a degree: %s, seed %i, %o", (rig, seed, swimmer) => {
    for (const { off, sigma } of swimAndFind(rig, seed, swimmer)) {
      expect(off).toBeLessThan(0.5);
      // Three standard deviations of the least known turn; the other two add a little.
      expect(off).toBeLessThan(3.5 * sigma);
      expect(sigma).toBeLessThan(0.5);
    }
  });
});

describe("A still pose", () => {
  it("alone leaves the turn about the vertical open, and says what would show it", () => {
    const { mounting, handled } = mounted(2, 1);
    handled.hold(attitude(20), 4);
    for (const outcome of mounting.result()) {
      expect(outcome).toMatchObject({
        ok: false,
        reason: expect.stringMatching(/about the vertical.*bearing/),
      });
    }
  });

  it("and the nose's compass bearing give all three angles, to what a bearing is worth", () => {
    // The nose 70° left of east looks 20° east of north.
    const { truth, mounting, handled } = mounted(3, 2, { bearing: 20 * RAD_PER_DEG }, true);
    handled.hold(attitude(70), 4);
    mounting.result().forEach((outcome, i) => {
      const found = numbers(outcome);
      // Exact but for noise and 2 mg of bias, which a dip of 69° makes 0.4° of heading.
      expect(between(found, truth[i]!.mounting)).toBeLessThan(0.6);
      // A bearing is taken to be good to 2°.
      expect(found.sigmaDeg).toBeGreaterThan(1.9);
    });
  });

  it("and one on the side give all three angles to half a degree once accelerometers are calibrated", () => {
    for (const seed of [1, 2, 3]) {
      const { truth, mounting, handled } = mounted(
        3,
        seed,
        { poses: [LEVEL, ON_ITS_LEFT], accelBiases: [0.02, 0.02, 0.02] },
        true,
      );
      handled
        .hold(attitude(33), 4)
        .turn(1, () => [-Math.PI / 2, 0, 0])
        .hold(attitude(-50, 0, -90), 4);
      mounting.result().forEach((outcome, i) => {
        const found = numbers(outcome);
        expect(between(found, truth[i]!.mounting)).toBeLessThan(0.5);
        expect(found.sigmaDeg).toBeLessThan(0.5);
      });
    }
  });

  it("and one on the side are limited by an uncalibrated accelerometer, and say so", () => {
    const { truth, mounting, handled } = mounted(3, 4, { poses: [LEVEL, ON_ITS_LEFT] });
    handled
      .hold(attitude(33), 4)
      .turn(1, () => [-Math.PI / 2, 0, 0])
      .hold(attitude(33, 0, -90), 4);
    mounting.result().forEach((outcome, i) => {
      if (!outcome.ok) throw new Error(outcome.reason);
      // 20 mg are 1.1° of tilt, an axis.
      expect(outcome.numbers.sigmaDeg).toBeGreaterThan(0.5);
      expect(outcome.warnings.join()).toMatch(/six positions/);
      expect(between(outcome.numbers, truth[i]!.mounting)).toBeLessThan(2.5);
    });
  });

  it("may be held pitched and rolled, as long as one says how", () => {
    const pose = { pitch: 12 * RAD_PER_DEG, roll: -8 * RAD_PER_DEG };
    const { truth, mounting, handled } = mounted(2, 5, { poses: [pose], bearing: 0 }, true);
    handled.hold(attitude(90, 12, -8), 4);
    mounting.result().forEach((outcome, i) => {
      expect(between(numbers(outcome), truth[i]!.mounting)).toBeLessThan(0.6);
    });
  });

  it("is not taken while the body moves", () => {
    const { mounting, handled } = mounted(2, 6);
    handled.turn(8, (timeS) => [0, 0, 0.2 * Math.sin(4 * timeS)]);
    expect(mounting.progress()).toEqual({ share: 0, text: "Hold the body straight, still and level." });
    expect(mounting.result()[0]).toMatchObject({ ok: false, reason: expect.stringContaining("never still") });
  });

  it("asked for twice is not the same pose held longer", () => {
    const { mounting, handled } = mounted(1, 7, { poses: [LEVEL, ON_ITS_LEFT] });
    handled.hold(attitude(0), 10);
    expect(mounting.progress().text).toBe("Hold the body straight, still and 90° left side down.");
  });
});

describe("A movement that is no bend", () => {
  it("leaves the turn about the vertical open", () => {
    const { mounting, handled } = mounted(3, 8, { bend: true });
    handled
      .hold(attitude(0), 4)
      .turn(15, (timeS) => [0.6 * Math.sin(5 * timeS), 0.5 * Math.sin(3 * timeS), 0]);
    expect(mounting.progress().share).toBe(1);
    for (const outcome of mounting.result()) expect(outcome.ok).toBe(false);
  });

  it("a body that stays still after its pose is told to bend", () => {
    const { mounting, handled } = mounted(2, 9, { bend: true });
    handled.hold(attitude(0), 8);
    expect(mounting.progress().text).toMatch(/bend the body from side to side/);
    expect(mounting.result()[0]).toMatchObject({ ok: false, reason: expect.stringContaining("not bent") });
  });
});

it("six-axis sensors need no magnetometer when the body is held in two poses", () => {
  const random = Random.forStream(3, 5);
  const truth = [place({ mounting: anyMounting(random) })];
  const mounting = new Mounting({
    sensors: [place()],
    models: [SIX_AXIS],
    rateHz: 100,
    lengthM: 1,
    poses: [LEVEL, ON_ITS_LEFT],
    bend: false,
    bearing: 0.3,
  });
  new Handled(truth, mounting, { model: SIX_AXIS })
    .hold(attitude(0), 4)
    .turn(1, () => [-1, 0, 0])
    .hold(attitude(9, 0, -90), 4);
  expect(between(numbers(mounting.result()[0]!), truth[0]!.mounting)).toBeLessThan(2.5);
});

it("angles written to the rig file are the rotation that was found, for any rotation", () => {
  const angle = fc.double({ min: -179, max: 179, noNaN: true });
  fc.assert(
    fc.property(angle, fc.double({ min: -89, max: 89, noNaN: true }), angle, (yawDeg, pitchDeg, rollDeg) => {
      const mounting = { yawDeg, pitchDeg, rollDeg };
      // The root of rounding near a right angle of pitch.
      expect(between(mountingAngles(quaternionOf(mounting)), mounting)).toBeLessThan(1e-5);
    }),
  );
});
