import { describe, expect, it } from "vitest";
import { ChainFusion, type ChainFusionOptions } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { CONDITION, HAS_INERTIAL, type Sweep, TRUST } from "../../bridge/sweep.ts";
import { fillRow, oneSensor, RATE_HZ, rest, totalError, turned } from "./motion.ts";

/** Plus and minus, rad/s. */
const RANGE = 6;
/** A roll about the nose axis, two beats a second, that swells over a second: then up to 10 rad/s, clipped half of the time. */
const roll = (t: number) => 0.8 * Math.min(1, t) * Math.sin(4 * Math.PI * t);

interface Run {
  readonly fusion: ChainFusion;
  readonly sweep: Sweep;
  /** Greatest total error while the motion lasts, degrees. */
  readonly worstDeg: number;
}

/** Rest, then a rolling motion that is clipped on the sensor's own axis `axis`, which points to the nose; then rest. */
function rollClipped(
  seconds: number,
  options: Partial<ChainFusionOptions>,
  { axis = 0, flagged = false, clip = true } = {},
): Run {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: RATE_HZ, heading: "magnetic", ...options });
  const sweep = oneSensor();
  rest(fusion, sweep, 15, [1, 0, 0, 0]);
  const startS = sweep.timeS;
  let worst = 0;
  for (let i = 1; i <= seconds * RATE_HZ; i++) {
    const t = i / RATE_HZ;
    const mean = (roll(t) - roll(t - 1 / RATE_HZ)) * RATE_HZ;
    const read = clip ? Math.max(-RANGE, Math.min(RANGE, mean)) : mean;
    fillRow(sweep, 0, turned([roll(t - 0.5 / RATE_HZ), 0, 0]), [read, 0, 0]);
    sweep.raw.fill(0);
    sweep.raw[axis] = read;
    sweep.conditions[0] = flagged && Math.abs(read) === RANGE ? CONDITION.GYRO_CLIPPED : 0;
    sweep.timeS = startS + t;
    fusion.step(sweep);
    worst = Math.max(worst, totalError(fusion, turned([roll(t), 0, 0])));
  }
  return { fusion, sweep, worstDeg: worst * DEG_PER_RAD };
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
