import { describe, expect, it } from "vitest";
import { HealthCollector } from "../../bridge/history/collector.ts";
import { FIGURE_KEYS, type FigureKey } from "../../bridge/history/figures.ts";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { createSweep, HAS_INERTIAL } from "../../bridge/sweep.ts";
import type { Flag } from "../../bridge/wire/flag.ts";

const LIMITS = Object.fromEntries(FIGURE_KEYS.map((key) => [key, 1])) as Record<FigureKey, number>;
const EXPECTED = { gravityMPerS2: STANDARD_GRAVITY, fieldUT: null };

/** Some sensors, the second with a calibration that takes 3 °/s off its y axis, and what the health room says of them. */
function bench(sensorCount: number, periods: readonly number[] = []) {
  const array = (width = 1, value = 0) => new Float64Array(sensorCount * width).fill(value);
  const run = {
    stillS: array(),
    gyroBias: array(3),
    gravity: array(1, STANDARD_GRAVITY),
    fieldUT: array(1, 50),
    gyroNoise: array(1, 0.006 * RAD_PER_DEG),
    accelNoise: array(1, 1e-4 * STANDARD_GRAVITY),
  };
  const rest = { windowEnded: new Uint8Array(sensorCount), gyroInstability: array(1, Number.NaN), run };
  const health = { gyroHeadroom: array(1, 1), accelHeadroom: array(1, 1), rest };
  const sensors = Array.from({ length: sensorCount }, (_, i) => ({
    name: `S${i + 1}`,
    serial: `K-${i + 1}`,
    model: "nine axes",
    period: periods[i] ?? 1,
    knownBias: i === 1 ? [0, 3 * RAD_PER_DEG, 0] : [0, 0, 0],
    limits: LIMITS,
  }));
  const collector = new HealthCollector(sensors, health);
  const sweep = createSweep(sensorCount);
  sweep.present.fill(HAS_INERTIAL);
  /** A sweep at which the windows of all sensors end, their runs being so long by then. */
  const window = (timeS: number, stillS: number) => {
    run.stillS.fill(stillS);
    rest.windowEnded.fill(1);
    sweep.timeS = timeS;
    collector.sweep(sweep);
    rest.windowEnded.fill(0);
  };
  return { collector, health, run, sweep, window };
}

describe("rest periods", () => {
  it("are told apart: a run that goes on is one, a run as short as the first anew is another", () => {
    const { collector, window } = bench(1);
    for (const [timeS, stillS] of [
      [4, 3],
      [7, 6],
      [40, 3],
      [80, 3],
      [83, 6],
    ] as const)
      window(timeS, stillS);
    const [sensor] = collector.sensors(EXPECTED);
    expect(sensor!.rests.map(({ startS, stillS }) => [startS, stillS])).toEqual([
      [1, 6],
      [37, 3],
      [77, 6],
    ]);
    expect(sensor!.restS).toBe(15);
  });

  it("count by their length in the figures of the trial", () => {
    const { collector, run, window } = bench(1);
    run.gyroBias[0] = RAD_PER_DEG;
    window(9, 9);
    run.gyroBias[0] = 5 * RAD_PER_DEG;
    run.gravity[0] = STANDARD_GRAVITY * 1.004;
    window(60, 3);
    const { figures, rests } = collector.sensors(EXPECTED)[0]!;
    // (9 s of 1 + 3 s of 5) / 12 s, and a quarter of 4 mg; six digits are kept.
    expect(figures.gyroBiasDegPerS).toBeCloseTo(2, 5);
    expect(figures.gravityOffMilliG).toBeCloseTo(1, 2);
    expect(rests.map(({ gyroBiasDegPerS }) => gyroBiasDegPerS)).toEqual([1, 5]);
  });

  it("without any, nothing is known of what only rest tells", () => {
    const { collector, sweep } = bench(1);
    collector.sweep(sweep);
    const { figures, restS } = collector.sensors(EXPECTED)[0]!;
    const { lostPercent, ...atRest } = figures;
    expect([restS, lostPercent]).toEqual([0, 0]);
    expect(Object.values(atRest).every((value) => value === null)).toBe(true);
  });
});

it("the bias is the sensor's own: what its calibration takes off is put back", () => {
  const { collector, run, window } = bench(2);
  run.gyroBias[3] = 4 * RAD_PER_DEG;
  window(4, 3);
  expect(collector.sensors(EXPECTED)[1]!.figures.gyroBiasDegPerS).toBe(5);
});

it("the field is held against the site and the others, whichever is nearer; of fewer than three others nothing is known", () => {
  const four = bench(4);
  four.run.fieldUT.set([50, 50, 55, 50]);
  four.window(4, 3);
  const offs = (fieldUT: number | null) =>
    four.collector.sensors({ ...EXPECTED, fieldUT }).map(({ figures }) => figures.fieldOffPercent);
  expect(offs(null)).toEqual([0, 0, 10, 0]);
  expect(offs(55)).toEqual([0, 0, 0, 0]);
  const two = bench(2);
  two.window(4, 3);
  expect(two.collector.sensors(EXPECTED)[0]!.figures.fieldOffPercent).toBeNull();
});

it("delivery counts what was due, lost sweeps too, and a slow sensor owes less; headroom is the least there was", () => {
  const { collector, health, sweep } = bench(3, [1, 2, 1]);
  for (let k = 0; k < 8; k++) {
    sweep.lostBefore = k === 3 ? 2 : 0;
    sweep.present[1] = k % 2 === 0 ? HAS_INERTIAL : 0;
    sweep.present[2] = 0;
    health.gyroHeadroom.fill(k === 5 ? 0.25 : 0.75);
    collector.sweep(sweep);
  }
  const [whole, slow, absent] = collector.sensors(EXPECTED);
  expect([whole, slow, absent].map((sensor) => sensor!.deliveredPercent)).toEqual([80, 80, 0]);
  expect([whole, absent].map((sensor) => sensor!.gyroHeadroomPercent)).toEqual([25, null]);
});

it("flags are counted by kind, for the sensor or the rig", () => {
  const { collector } = bench(2);
  const flag = (kind: Flag["kind"], sensor: number) => collector.flag({ kind, sensor } as Flag);
  flag("stuck axis", 1);
  flag("stuck axis", 1);
  flag("link silent", -1);
  expect(collector.sensors(EXPECTED).map(({ flags }) => flags)).toEqual([{}, { "stuck axis": 2 }]);
  expect(collector.rigFlags).toEqual({ "link silent": 1 });
});
