import { expect, test } from "vitest";
import { TailbeatMeter } from "../../bridge/wave/tailbeat.ts";
import { noise } from "./waves.ts";

const RATE_HZ = 100;
const LENGTH_M = 0.64;

/** Runs a meter over `lateral(t)` from `fromS` to `toS`; calls `each` after every sweep. */
function run(
  meter: TailbeatMeter,
  lateral: (t: number) => number,
  [fromS, toS]: [number, number],
  each: (t: number, ended: boolean) => void = () => {},
): void {
  for (let i = Math.round(fromS * RATE_HZ); i < Math.round(toS * RATE_HZ); i++) {
    each(i / RATE_HZ, meter.step(i / RATE_HZ, lateral(i / RATE_HZ)));
  }
}

const sine =
  (frequencyHz: number, peakToPeakM: number, offsetM = 0) =>
  (t: number) =>
    offsetM + 0.5 * peakToPeakM * Math.sin(2 * Math.PI * frequencyHz * t + 0.7);

test("a sinusoid of 0.3 to 8 Hz at 100 sweeps a second gives every frequency", () => {
  for (const frequencyHz of [0.3, 0.5, 0.83, 1.4, 2.2, 3.7, 5.1, 8]) {
    const meter = new TailbeatMeter({ lengthM: LENGTH_M });
    let beats = 0;
    const settleS = 6 / frequencyHz + 8; // the mean line of a slow beat is found within a few beats
    run(meter, sine(frequencyHz, 0.12, 0.05), [0, settleS + 10 / frequencyHz], (t, ended) => {
      if (t < settleS || !ended) return;
      beats++;
      // The promise of this meter: at 8 Hz the straight line between sweeps is off by up to 0.05 % of a period, and by
      // less with the square of sweeps a beat.
      expect(Math.abs(meter.frequencyHz! / frequencyHz - 1)).toBeLessThan(0.002);
    });
    expect(beats).toBeGreaterThanOrEqual(9);
    expect(beats).toBeLessThanOrEqual(11);
  }
});

test("beats follow each other without gap or overlap", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  let endedS = Number.NaN;
  run(meter, sine(1.3, 0.1), [0, 10], (_t, ended) => {
    if (!ended) return;
    const beat = meter.lastBeat!;
    if (!Number.isNaN(endedS)) expect(beat.startS).toBe(endedS);
    expect(beat.frequencyHz).toBeCloseTo(1 / (beat.endS - beat.startS), 12);
    endedS = beat.endS;
  });
  expect(endedS).toBeGreaterThan(9);
});

test("noise below the threshold never beats, whatever the pose held", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  const next = noise();
  run(
    meter,
    () => 0.2 + 0.004 * LENGTH_M * next(),
    [0, 120],
    (_t, ended) => {
      expect(ended).toBe(false);
      expect(meter.frequencyHz).toBeNull();
      expect(meter.phase).toBeNaN();
    },
  );
  expect(meter.lastBeat).toBeNull();
});

test("noise on a beat makes no extra beats", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  const next = noise();
  const clean = sine(1, 0.1);
  let beats = 0;
  run(
    meter,
    (t) => clean(t) + 0.003 * next(),
    [0, 62],
    (t, ended) => {
      if (t < 2 || !ended) return;
      beats++;
      // Noise of 3 mm moves a crossing of slope 0.31 m/s by up to 10 ms; two of them bound a period of 1 s.
      expect(Math.abs(meter.frequencyHz! - 1)).toBeLessThan(0.02);
    },
  );
  expect(beats).toBe(60);
});

test("a change of frequency is followed within two beats, faster or slower", () => {
  for (const [firstHz, secondHz] of [
    [1, 2.5],
    [2.5, 1],
    [0.8, 1],
    [3, 0.7],
  ] as const) {
    const meter = new TailbeatMeter({ lengthM: LENGTH_M });
    const changeS = 20 / firstHz; // whole beats: the excursion is continuous
    run(meter, (t) => 0.05 * Math.sin(2 * Math.PI * firstHz * t), [0, changeS]);
    run(meter, (t) => 0.05 * Math.sin(2 * Math.PI * secondHz * (t - changeS)), [
      changeS,
      changeS + 2 / secondHz + 0.2 / secondHz,
    ]);
    // The threshold is passed well within a fifth of a beat; a settling mean line leaves at most 1 %.
    expect(Math.abs(meter.frequencyHz! / secondHz - 1)).toBeLessThan(0.01);
  }
});

test("two periods after the tail stops there is neither frequency nor phase", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  run(meter, (t) => 0.05 * Math.sin(2 * Math.PI * 2 * t), [0, 10]);
  expect(meter.frequencyHz).not.toBeNull();
  run(meter, () => 0, [10, 11.1]);
  expect(meter.frequencyHz).toBeNull();
  expect(meter.phase).toBeNaN();
  expect(meter.lastBeat!.endS).toBeLessThan(10.1);
});

test("a pause is not counted as one long beat", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  const beat = (t: number) => 0.05 * Math.sin(2 * Math.PI * 2 * t);
  run(
    meter,
    (t) => (t > 5 && t < 7 ? 0 : beat(t)),
    [0, 12],
    (_t, ended) => {
      if (ended) expect(meter.frequencyHz).toBeGreaterThan(1.5);
    },
  );
});

test("phase runs from 0 at the upward crossing to 1 at the next", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  const frequencyHz = 0.9;
  run(
    meter,
    (t) => 0.05 * Math.sin(2 * Math.PI * frequencyHz * t),
    [0, 20],
    (t) => {
      if (t < 8) return;
      const expected = (frequencyHz * t) % 1;
      // Between crossing and threshold (a fifth of half the amplitude: 0.03 of a beat) the old beat is held at 1.
      if (expected > 0.05) expect(Math.abs(meter.phase - expected)).toBeLessThan(0.002);
    },
  );
});

test("a tail held to one side has its own mean line, and lost sweeps lose no beat", () => {
  const meter = new TailbeatMeter({ lengthM: LENGTH_M });
  const next = noise();
  let beats = 0;
  for (let i = 0; i < 3000; i++) {
    if (next() > 0.4) continue; // three in ten sweeps lost
    if (meter.step(i / RATE_HZ, sine(1.5, 0.1, -0.3)(i / RATE_HZ))) beats++;
  }
  // 30 s x 1.5 Hz = 45, less the part of a beat at either end and the first side seen.
  expect(beats).toBeGreaterThanOrEqual(42);
  expect(beats).toBeLessThanOrEqual(45);
  expect(Math.abs(meter.frequencyHz! / 1.5 - 1)).toBeLessThan(0.01);
});
