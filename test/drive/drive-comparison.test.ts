/** Gain and lag against a drive whose answer is known, in closed form. */
import { describe, expect, test } from "vitest";
import { TRUST } from "../../bridge/sweep.ts";
import { driven, MIDLINE_GAIN, MIDLINE_LAG_S, SETTINGS, SWAY_M_PER_RAD } from "./driven-chain.ts";

const AMPLITUDE = 0.3;
const tone = (hz: number) => (timeS: number) => AMPLITUDE * Math.sin(2 * Math.PI * hz * timeS + 0.4);
/**
 * A sixth of a degree, ten times what a rehearsed sensor's fused yaw carries within some cycles. Four cycles at 5 Hz and
 * 100 Hz are 80 samples: one standard deviation of the gain is then 0.2 %.
 */
const NOISE = 0.003;

describe("with jitter, losses and noise, lag within 1 ms and gain within 1 %", () => {
  const cases = [0.5, 1, 2, 3.5, 5].flatMap((hz) => [100, 200].map((rate) => [hz, rate] as const));

  test.each(cases)("%f Hz, sampled at %i Hz", (hz, rate) => {
    const gains = [1, 0.8, 1.6];
    const lagsS = [0.012, -0.02, 0.07];
    const drive = driven({
      yaw: tone(hz),
      gains,
      lagsS,
      sweepHz: rate,
      referenceHz: rate,
      jitter: 0.3,
      lostShare: 0.03,
      noise: NOISE,
      seed: Math.round(10 * hz) + rate,
    });
    const { method, figures, trial } = drive.comparison;
    expect(method).toBe("whole cycles");
    for (const { gain, lagS } of [figures, trial.figures()]) {
      gains.forEach((expected, i) => {
        expect(Math.abs(gain[i]! / expected - 1)).toBeLessThan(0.01);
        expect(Math.abs(lagS[i]! - lagsS[i]!)).toBeLessThan(0.001);
      });
    }
  });

  test.each([100, 200])("a drive that never repeats itself, sampled at %i Hz", (rate) => {
    // Two tones that have no common period within the trial.
    const yaw = (timeS: number) => 0.5 * (tone(0.7)(timeS) + tone(1.13)(timeS));
    const gains = [1, 0.8];
    const lagsS = [0.012, -0.02];
    const settings = { yaw, gains, lagsS, jitter: 0.3, lostShare: 0.03, noise: NOISE, seed: rate };
    const drive = driven({ ...settings, sweepHz: rate, referenceHz: rate });
    const { method, figures } = drive.comparison;
    expect(method).toBe("least squares");
    expect(drive.loop(0)).toBeNull();
    gains.forEach((expected, i) => {
      expect(Math.abs(figures.gain[i]! / expected - 1)).toBeLessThan(0.01);
      expect(Math.abs(figures.lagS[i]! - lagsS[i]!)).toBeLessThan(0.001);
    });
  });
});

test("a drive whose frequency rises all along is followed, by whichever method", () => {
  const yaw = (timeS: number) => AMPLITUDE * Math.sin(2 * Math.PI * (0.5 * timeS + 0.05 * timeS * timeS));
  const { gain, lagS } = driven({ yaw, gains: [0.9], lagsS: [0.03] }).comparison.trial.figures();
  expect(Math.abs(gain[0]! / 0.9 - 1)).toBeLessThan(0.01);
  expect(Math.abs(lagS[0]! - 0.03)).toBeLessThan(0.001);
});

test("the midline's displacement is compared with the sway, station by station", () => {
  const trial = driven({ yaw: tone(1), gains: [1], lagsS: [0] }).trial();
  const stations = trial.filter(({ sensor }) => sensor < 0);
  expect(stations.map(({ station }) => station)).toEqual([0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1]);
  for (const { against, gain, lagS } of stations) {
    expect(against).toBe("sway");
    expect(gain).toBeCloseTo(MIDLINE_GAIN, 3);
    expect(lagS).toBeCloseTo(MIDLINE_LAG_S, 4);
  }
});

test("RMSE is that of the tones' difference, and without the lag that of their amplitudes; r2 is then 1", () => {
  const hz = 1;
  const lagS = 0.05;
  const { figures } = driven({ yaw: tone(hz), gains: [0.9], lagsS: [lagS] }).comparison;
  const angle = 2 * Math.PI * hz * lagS;
  // |1 - g exp(-i a)| of phasors, over the root of two.
  const apart = Math.hypot(1 - 0.9 * Math.cos(angle), 0.9 * Math.sin(angle));
  expect(figures.rmse[0]).toBeCloseTo((AMPLITUDE * apart) / Math.SQRT2, 4);
  expect(figures.rmseLagRemoved[0]).toBeCloseTo((AMPLITUDE * 0.1) / Math.SQRT2, 4);
  expect(figures.r2[0]).toBeCloseTo(1, 6);
});

test("half the variance in noise makes an r2 of one half", () => {
  const noise = AMPLITUDE / Math.SQRT2;
  const { r2 } = driven({
    yaw: tone(1),
    gains: [1],
    lagsS: [0],
    noise,
    seconds: 200,
  }).comparison.trial.figures();
  // 390 windows of 400 samples, overlapping eightfold: 0.01 is four standard deviations.
  expect(Math.abs(r2[0]! - 0.5)).toBeLessThan(0.02);
});

test("lags beyond half a cycle are told apart by the neighbours'", () => {
  const lagsS = [0, 0.3, 0.6, 0.9, 1.2];
  const { figures } = driven({ yaw: tone(1), gains: lagsS.map(() => 1), lagsS }).comparison;
  expect([...figures.lagS].slice(0, 5).map((lag) => Number(lag.toFixed(4)))).toEqual(lagsS);
});

test("sign, zero and delay of the rig file are put right", () => {
  const readings: number[][] = [];
  const settings = { yawReversed: true, yawZeroDeg: 90, swayReversed: true, swayZeroMm: 40, delayMs: 25 };
  const { figures } = driven({
    yaw: tone(1),
    gains: [1],
    lagsS: [0],
    settings,
    onReference: (...reading) => readings.push(reading),
  }).comparison;
  // A drive that counts the other way looks half a cycle late; its readings are 25 ms older than their ticks.
  expect(Math.abs(figures.lagS[0]!)).toBeCloseTo(0.5 - 0.025, 4);
  const [timeS, yaw, sway] = readings[500]!;
  const drive = tone(1)(timeS! + 0.025);
  expect(yaw).toBeCloseTo(Math.PI / 2 - drive, 5);
  expect(sway).toBeCloseTo(0.04 - SWAY_M_PER_RAD * drive, 6);
});

test("a sensor that turns on through half a turn is compared all the same", () => {
  const yaw = (timeS: number) => Math.PI + tone(1)(timeS);
  const { figures } = driven({ yaw, gains: [1], lagsS: [0.01] }).comparison;
  expect(figures.gain[0]).toBeCloseTo(1, 4);
  expect(figures.lagS[0]).toBeCloseTo(0.01, 5);
});

test("while the drive rests there are no figures, and those of the trial stay", () => {
  const yaw = (timeS: number) => (timeS < 12 ? tone(1)(timeS) : tone(1)(12));
  const { comparison } = driven({ yaw, gains: [1], lagsS: [0.02], seconds: 20 });
  expect(comparison.method).toBeNull();
  expect(comparison.figures.gain[0]).toBeNaN();
  expect(comparison.trial.figures().lagS[0]).toBeCloseTo(0.02, 3);
});

test("a lost sensor has no figures, its neighbours have theirs", () => {
  const drive = driven({ yaw: tone(2), gains: [1, 1], lagsS: [0.01, 0.01] });
  const turned = new Float64Array([1, 0, 0, 0, 1, 0, 0, 0]);
  for (let i = 0; i < 400; i++) {
    const timeS = 20 + i / 100;
    const half = 0.5 * tone(2)(timeS - 0.01);
    turned.set([Math.cos(half), 0, 0, Math.sin(half)], 4);
    drive.sweep(timeS, turned, Uint8Array.of(TRUST.LOST, TRUST.GOOD), new Float64Array(123), 0);
    drive.reference(timeS + 0.003, tone(2)(timeS + 0.003), 0);
  }
  const { gain } = drive.comparison.figures;
  expect(gain[0]).toBeNaN();
  expect(gain[1]).toBeCloseTo(1, 3);
});

test("sweeps in a hole of the drive's readings are left out, the others are told in order", () => {
  const kept: number[] = [];
  const drive = driven({
    yaw: tone(1),
    gains: [1],
    lagsS: [0],
    seconds: 0.1,
    onReference: (t) => kept.push(t),
  });
  const still = new Float64Array([1, 0, 0, 0]);
  const sweep = (timeS: number) => drive.sweep(timeS, still, new Uint8Array(1), new Float64Array(123), 0);
  for (let i = 10; i < 60; i++) {
    sweep(i / 100);
    if (i < 20 || i >= 40) drive.reference(i / 100 + 0.005, 0, 0);
  }
  expect(kept).toEqual([...kept].sort((a, b) => a - b));
  const inHole = kept.filter((timeS) => timeS > 0.2 && timeS < 0.4);
  expect(inHole).toEqual([]);
  expect(kept.filter((timeS) => timeS > 0.42).length).toBeGreaterThan(10);
});

test("the loop of a lagging sensor is the ellipse of its gain and lag", () => {
  const hz = 1;
  const drive = driven({ yaw: tone(hz), gains: [0.8], lagsS: [0.04] });
  const loop = drive.loop(0)!;
  const area = Math.PI * 0.8 * AMPLITUDE ** 2 * Math.sin(2 * Math.PI * hz * 0.04);
  // A polygon of 100 corners lacks 0.07 % of its ellipse.
  expect(Math.abs(loop.area / area - 1)).toBeLessThan(0.003);
  expect(loop.reference).toHaveLength(loop.measured.length);
  expect(loop.reference.length).toBeGreaterThan(30);
  expect(Math.max(...loop.reference)).toBeCloseTo(AMPLITUDE, 2);
  expect(Math.max(...loop.measured)).toBeCloseTo(0.8 * AMPLITUDE, 2);
});

test("without cycles there is no loop", () => {
  expect(driven({ yaw: () => 0, gains: [1], lagsS: [0], seconds: 3 }).loop(0)).toBeNull();
});

test("the sensor next to the driven station is the nearest", () => {
  const at = (station: number) =>
    driven({
      yaw: tone(1),
      gains: [1, 1, 1],
      lagsS: [0, 0, 0],
      seconds: 1,
      settings: { ...SETTINGS, station },
    }).nearestSensor;
  expect([at(0), at(0.5), at(1)]).toEqual([0, 1, 2]);
});
