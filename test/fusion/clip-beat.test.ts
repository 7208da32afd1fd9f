/** What is remembered of clipped beats, for six-axis sensors that beat about the vertical: nothing else tells of them. */
import { describe, expect, it } from "vitest";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { beatPeriod, recallBeat, recalled, rememberBeat } from "../../bridge/fusion/clip-beat.ts";
import { DEFAULT_PARAMETERS } from "../../bridge/fusion/parameters.ts";
import { createRecord, Slot } from "../../bridge/fusion/record.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { HAS_INERTIAL } from "../../bridge/sweep.ts";
import { fillRow, headingError, oneSensor, RATE_HZ, turned } from "./motion.ts";

const RANGE = 6;

/** Yaws by the angle at t from time 0 on, clipped. @returns how far the heading error swings in each second, degrees */
function yawClipped(yaw: (t: number) => number, seconds: number, gyroRange: number | undefined = RANGE) {
  const fusion = new ChainFusion({
    sensorCount: 1,
    rateHz: RATE_HZ,
    heading: "free",
    gyroRanges: [gyroRange],
  });
  const sweep = oneSensor();
  sweep.present[0] = HAS_INERTIAL;
  const most = new Array<number>(seconds).fill(-Infinity);
  const least = new Array<number>(seconds).fill(Infinity);
  for (let i = 0; i < seconds * RATE_HZ; i++) {
    const t = i / RATE_HZ;
    const mean = i === 0 ? 0 : (yaw(t) - yaw(t - 1 / RATE_HZ)) * RATE_HZ;
    const read = Math.max(-RANGE, Math.min(RANGE, mean));
    fillRow(sweep, 0, [1, 0, 0, 0], [0, 0, read]);
    sweep.raw.fill(0);
    sweep.raw[2] = read;
    sweep.timeS = t;
    fusion.step(sweep);
    const off = headingError(fusion, turned([0, 0, yaw(t)])) * DEG_PER_RAD;
    const second = Math.floor(t);
    most[second] = Math.max(most[second]!, off);
    least[second] = Math.min(least[second]!, off);
  }
  return most.map((value, second) => value - least[second]!);
}

const beating = (t: number) => 0.4 * Math.sin(8 * Math.PI * t);
/** Two and a half to five and a half beats a second, changing all the time. */
const uneven = (t: number) => 0.4 * Math.sin(8 * Math.PI * (t + 0.2 * Math.sin(2 * t)));

describe("a clipped beat", () => {
  it("that repeats is foreseen: the error swings by a third of what it did at first, a sixth of what is not made good", () => {
    const swings = yawClipped(beating, 8);
    const known = Math.max(...swings.slice(4));
    expect(known).toBeLessThan(swings[0]! / 3);
    expect(known).toBeLessThan(Math.max(...yawClipped(beating, 8, Infinity)) / 6);
  });

  it("that never repeats is not taken for one that does: it is made good no worse than not at all", () => {
    const mean = (swings: readonly number[]) => swings.reduce((sum, swing) => sum + swing, 0) / swings.length;
    expect(mean(yawClipped(uneven, 12))).toBeLessThan(mean(yawClipped(uneven, 12, Infinity)));
  });
});

describe("the memory of beats", () => {
  const remembering = (middles: readonly number[]) => {
    const r = createRecord(DEFAULT_PARAMETERS, 1 / RATE_HZ);
    r[Slot.CLIP_SPAN] = 0.06;
    for (const middleS of middles) rememberBeat(r, 2, 1, middleS, 0.3, 0.01);
    return r;
  };

  it("knows the period once two have agreed, for the same axis and sense alone", () => {
    expect(beatPeriod(remembering([1, 1.25]), 2, 1)).toBe(0);
    const r = remembering([1, 1.25, 1.5]);
    expect(beatPeriod(r, 2, 1)).toBeCloseTo(0.25, 12);
    expect([beatPeriod(r, 2, -1), beatPeriod(r, 1, 1)]).toEqual([0, 0]);
  });

  it("begins anew with a stretch out of time", () => {
    expect(beatPeriod(remembering([1, 1.25, 1.5, 1.9]), 2, 1)).toBe(0);
    expect(beatPeriod(remembering([1, 1.25, 1.5, 1.9, 2.3, 2.7]), 2, 1)).toBeCloseTo(0.4, 12);
  });

  it("recalls what the stretches turned, as far as the one at hand has gone, if that comes in time", () => {
    const r = remembering([1, 1.25, 1.5]);
    r[Slot.CLIP_LAST + 3] = 1.72;
    expect(recallBeat(r, 2, 1)).toBe(true);
    expect(recalled[0]).toBeCloseTo(0.3, 12);
    r[Slot.CLIP_SPAN] = 0.03;
    expect(recallBeat(r, 2, 1)).toBe(true);
    expect(recalled[0]).toBeCloseTo(0.15, 12);
    r[Slot.CLIP_LAST + 3] = 1.62;
    expect(recallBeat(r, 2, 1)).toBe(false);
  });
});
