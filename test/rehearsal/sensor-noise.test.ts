import { expect, test } from "vitest";
import { Calibration } from "../../bridge/calibration/calibration.ts";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { Random } from "../../bridge/rehearsal/random.ts";
import { NoisySensor, type Part } from "../../bridge/rehearsal/sensor-noise.ts";
import { rigSchema, type SensorPlace } from "../../bridge/rig/rig.ts";
import { type SensorModel, sensorModelSchema } from "../../bridge/rig/sensor-model.ts";
import { ACCEL, CHANNELS, createSweep, GYRO, HAS_INERTIAL, HAS_MAG, MAG } from "../../bridge/sweep.ts";

const RATE_HZ = 100;
const MODEL: SensorModel = sensorModelSchema.parse({
  name: "Test unit",
  gyro: { rangeDegPerS: 500, noiseDegPerSPerSqrtHz: 0.01, biasDegPerS: 1 },
  accel: { rangeG: 8, noiseMicroGPerSqrtHz: 200, biasMilliG: 20 },
  mag: { rangeUT: 1200, noiseUT: 0.5 },
});
const PERFECT: SensorModel = sensorModelSchema.parse({
  name: "Perfect unit",
  gyro: { rangeDegPerS: 500, noiseDegPerSPerSqrtHz: 0, biasDegPerS: 0 },
  accel: { rangeG: 8, noiseMicroGPerSqrtHz: 0, biasMilliG: 0 },
  mag: { rangeUT: 1200, noiseUT: 0 },
});

/** A place on a rig, with what differs from a plain mounting. */
function place(extra: object = {}): SensorPlace {
  const sensor = (name: string, station: number) => ({ name, station, model: "test" });
  return rigSchema.parse({
    name: "Test rig",
    body: { kind: "dummy", lengthMm: 500 },
    hub: { rateHz: RATE_HZ },
    sensors: [{ ...sensor("S1", 0.1), ...extra }, sensor("S2", 0.9)],
  }).sensors[0];
}

const sensorOf = (model: SensorModel, at = place(), stream = 0) =>
  new NoisySensor(model, at, RATE_HZ, Random.forStream(5, stream));

const FELT = Float64Array.of(0.3, -0.2, 0.1, 1, -2, 9.5, 15, 8, -44);

test("noise and bias of every part are those of the model", () => {
  const sensor = sensorOf(MODEL);
  const count = 20_000;
  const raw = new Float64Array(CHANNELS);
  const sums = new Float64Array(CHANNELS);
  const squares = new Float64Array(CHANNELS);
  for (let i = 0; i < count; i++) {
    sensor.read(FELT, raw, 0);
    for (let k = 0; k < CHANNELS; k++) {
      sums[k] += raw[k] - FELT[k];
      squares[k] += (raw[k] - FELT[k]) ** 2;
    }
  }
  const expected = [
    { at: GYRO, noise: 0.01 * RAD_PER_DEG * Math.sqrt(50), bias: RAD_PER_DEG, scale: sensor.gyro.scale },
    {
      at: ACCEL,
      noise: 200e-6 * STANDARD_GRAVITY * Math.sqrt(50),
      bias: 0.02 * STANDARD_GRAVITY,
      scale: sensor.accel.scale,
    },
    { at: MAG, noise: 0.5, bias: 0, scale: sensor.mag!.scale },
  ];
  for (const { at, noise, bias, scale } of expected) {
    const whole = Math.hypot(noise, scale / Math.sqrt(12)); // rounding to counts adds its own variance
    for (let k = at; k < at + 3; k++) {
      const mean = sums[k] / count;
      const sigma = Math.sqrt(squares[k] / count - mean * mean);
      // Four standard errors of a standard deviation over 20 000 readings: 4 / sqrt(2n) = 2 %.
      expect(Math.abs(sigma / whole - 1)).toBeLessThan(0.02);
      expect(Math.abs(mean)).toBeLessThanOrEqual(bias + (4 * whole) / Math.sqrt(count));
    }
  }
});

test("bias is constant, and a unit's own", () => {
  const biasOf = (part: Part) => [...part.bias];
  expect(biasOf(sensorOf(MODEL, place(), 0).gyro)).toEqual(biasOf(sensorOf(MODEL, place(), 0).gyro));
  expect(biasOf(sensorOf(MODEL, place(), 0).gyro)).not.toEqual(biasOf(sensorOf(MODEL, place(), 1).gyro));
});

test("readings are whole counts and stop at full scale", () => {
  const sensor = sensorOf(MODEL);
  const raw = new Float64Array(CHANNELS);
  const { scale, fullCounts } = sensor.gyro;
  expect(scale * (fullCounts + 1)).toBeCloseTo(500 * RAD_PER_DEG, 12);
  sensor.read(FELT, raw, 0);
  for (let k = GYRO; k < GYRO + 3; k++) expect(raw[k] / scale).toBeCloseTo(Math.round(raw[k] / scale), 9);
  sensor.read(Float64Array.of(20, -20, 0, 200, 0, -200, 0, 2000, 0), raw, 0);
  expect(raw[GYRO]).toBe(scale * fullCounts);
  expect(raw[GYRO + 1]).toBe(-scale * fullCounts);
  expect(raw[ACCEL]).toBe(sensor.accel.scale * sensor.accel.fullCounts);
  expect(raw[MAG + 1]).toBe(sensor.mag!.scale * sensor.mag!.fullCounts);
});

test("a coarser unit has coarser counts; one finer than the packets gets theirs", () => {
  const withBits = (bits: number) => sensorOf({ ...MODEL, gyro: { ...MODEL.gyro, bits } }).gyro;
  expect(withBits(12).fullCounts).toBe(2047);
  expect(withBits(20).fullCounts).toBe(32_767);
  expect(withBits(12).scale).toBeCloseTo(16 * withBits(16).scale, 15);
});

test("the calibration in the rig file gives back what was felt, in body axes", () => {
  const mounted = place({
    mounting: { yawDeg: 30, pitchDeg: -70, rollDeg: 155 },
    calibration: {
      gyroBiasDegPerS: [1, -2, 0.5],
      accelBiasMPerS2: [0.1, 0.2, -0.3],
      accelScale: [1.02, 0.97, 1.01],
      magHardIronUT: [12, -30, 5],
      magSoftIron: [
        [1.1, 0.05, 0],
        [0.03, 0.95, -0.04],
        [0, 0.02, 1.03],
      ],
    },
  });
  const sensor = sensorOf(PERFECT, mounted);
  const sweep = createSweep(1);
  sweep.present[0] = HAS_INERTIAL | HAS_MAG;
  sensor.read(FELT, sweep.raw, 0);
  new Calibration([mounted]).apply(sweep);
  const counts = [sensor.gyro.scale, sensor.accel.scale, sensor.mag!.scale];
  // Each axis is rounded to half a count; a turn and the calibration's gains mix three of them.
  FELT.forEach((v, k) => {
    expect(Math.abs(sweep.values[k] - v)).toBeLessThan(counts[Math.floor(k / 3)]);
  });
});
