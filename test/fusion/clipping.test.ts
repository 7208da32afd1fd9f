import { describe, expect, it } from "vitest";
import { ChainFusion, type ChainFusionOptions } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { ACCEL, CONDITION, HAS_INERTIAL, type Sweep, TRUST } from "../../bridge/sweep.ts";
import { fillRow, oneSensor, RATE_HZ, rest, toBody, totalError, turned } from "./motion.ts";

/** Plus and minus, rad/s. */
const RANGE = 6;
/** A roll about the nose axis, two beats a second, that swells over a second: then up to 10 rad/s, clipped half of the time. */
const roll = (t: number) => 0.8 * Math.min(1, t) * Math.sin(4 * Math.PI * t);

interface Run {
  readonly fusion: ChainFusion;
  readonly sweep: Sweep;
  /** Greatest total error while the motion lasts, degrees, and its root mean square. */
  readonly worstDeg: number;
  readonly rmsDeg: number;
}

/** Rest, then a rolling motion that is clipped on the sensor's own axis `axis`, which points to the nose; then rest. */
function rollClipped(
  seconds: number,
  options: Partial<ChainFusionOptions>,
  { axis = 0, flagged = false, clip = true, sway = 0, forceCounts = true } = {},
): Run {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic", ...options });
  const sweep = oneSensor();
  rest(fusion, sweep, 15, [1, 0, 0, 0]);
  const startS = sweep.timeS;
  let worst = 0;
  let squares = 0;
  for (let i = 1; i <= seconds * RATE_HZ; i++) {
    const t = i / RATE_HZ;
    const mean = (roll(t) - roll(t - 1 / RATE_HZ)) * RATE_HZ;
    const read = clip ? Math.max(-RANGE, Math.min(RANGE, mean)) : mean;
    fillRow(sweep, 0, turned([roll(t - 0.5 / RATE_HZ), 0, 0]), [read, 0, 0]);
    const swayed = toBody(turned([roll(t - 0.5 / RATE_HZ), 0, 0]), [0, sway * Math.cos(4 * Math.PI * t), 0]);
    for (let i = 0; i < 3; i++) sweep.values[ACCEL + i]! += swayed[i]!;
    sweep.raw.fill(0);
    sweep.raw[axis] = read;
    sweep.conditions[0] = flagged && Math.abs(read) === RANGE ? CONDITION.GYRO_CLIPPED : 0;
    if (!forceCounts) sweep.conditions[0]! |= CONDITION.ACCEL_CLIPPED;
    sweep.timeS = startS + t;
    fusion.step(sweep);
    const error = totalError(fusion, turned([roll(t), 0, 0]));
    worst = Math.max(worst, error);
    squares += error * error;
  }
  const rmsDeg = Math.sqrt(squares / (seconds * RATE_HZ)) * DEG_PER_RAD;
  return { fusion, sweep, worstDeg: worst * DEG_PER_RAD, rmsDeg };
}

describe("a clipped angular rate", () => {
  it("is made good from its shoulders and the field: within 3° where it would be more than 10°", () => {
    expect(rollClipped(4, {}).worstDeg).toBeGreaterThan(10);
    // Not clipped: what the discrete steps leave.
    expect(rollClipped(4, {}, { clip: false }).worstDeg).toBeLessThan(0.2);
    expect(rollClipped(4, { gyroRanges: [RANGE] }).worstDeg).toBeLessThan(3);
  });

  it("is recognised by its flag alone, where the plateau lies below the known range", () => {
    expect(rollClipped(4, { gyroRanges: [35] }, { flagged: true }).worstDeg).toBeLessThan(3);
  });

  it("is made good about the sensor's own axis, however it is mounted", () => {
    // The sensor's z axis points to the nose, its x axis up, its y axis right.
    const gyroAxes = [0, 0, 1, 0, -1, 0, 1, 0, 0];
    expect(rollClipped(4, { gyroRanges: [RANGE], gyroAxes: [gyroAxes] }, { axis: 2 }).worstDeg).toBeLessThan(
      3,
    );
  });

  it("is made good from its shoulders alone where there is no field", () => {
    const worstDeg = (options: Partial<ChainFusionOptions>) =>
      rollClipped(4, { heading: "free", ...options }).worstDeg;
    expect(worstDeg({ gyroRanges: [RANGE] })).toBeLessThan(0.5 * worstDeg({}));
  });

  it("is made good within 3° without a field, from the specific force of a body that hardly accelerates", () => {
    const options: Partial<ChainFusionOptions> = { heading: "free", gyroRanges: [RANGE] };
    const { worstDeg } = rollClipped(4, options);
    expect(worstDeg).toBeLessThan(3);
    expect(worstDeg).toBeLessThan(0.6 * rollClipped(4, options, { forceCounts: false }).worstDeg);
  });

  it.each([
    // In step with the beat, as bad as can be: an error of the force's own size within its stated uncertainty.
    [2, 2],
    [5, 1.4],
    // Force counts for next to nothing here; it differs by what it does to the average over seconds.
    [15, 1.1],
    [40, 1.1],
  ])(
    "is left nearly alone by the specific force of a body that sways with %f m/s² (at most %f times the error)",
    (sway, factor) => {
      const options: Partial<ChainFusionOptions> = { heading: "free", gyroRanges: [RANGE] };
      const without = rollClipped(8, options, { sway, forceCounts: false });
      const withForce = rollClipped(8, options, { sway });
      expect(withForce.rmsDeg).toBeLessThan(factor * without.rmsDeg);
      expect(withForce.rmsDeg).toBeLessThan(0.75 * rollClipped(8, { heading: "free" }, { sway }).rmsDeg);
    },
  );

  it("is held against the orientation while it lasts and until it is made good, not longer", () => {
    const { fusion, sweep } = rollClipped(1.06, { gyroRanges: [RANGE] });
    expect(fusion.trust[0]).toBe(TRUST.CLIPPED);
    const during = fusion.inclinationSigma[0]!;
    sweep.raw.fill(0);
    rest(fusion, sweep, 1, turned([roll(1.06), 0, 0]));
    expect(fusion.trust[0]).toBe(TRUST.GOOD);
    expect(fusion.inclinationSigma[0]).toBeLessThan(during);
  });

  it("keeps the orientation finite when it never ends, or has no field, or a gap within", () => {
    const { fusion, sweep } = rollClipped(1, { gyroRanges: [RANGE] });
    for (let i = 0; i < 1000; i++) {
      sweep.raw[0] = RANGE;
      sweep.values[0] = RANGE;
      sweep.present[0] = i % 50 < 45 ? HAS_INERTIAL : 0;
      sweep.timeS += 1 / RATE_HZ;
      fusion.step(sweep);
    }
    expect(Math.abs(Math.hypot(...fusion.orientations) - 1)).toBeLessThan(1e-12);
    expect(fusion.headingSigma[0]).toBeGreaterThan(0);
  });
});
