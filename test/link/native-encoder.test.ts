import fc from "fast-check";
import { expect, test } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { FULL_SCALE_COUNTS } from "../../bridge/link/native.ts";
import { NativeDecoder } from "../../bridge/link/native-decoder.ts";
import { NativeEncoder } from "../../bridge/link/native-encoder.ts";
import type { HubHello } from "../../bridge/link/packets.ts";
import { ACCEL, CHANNELS, createSweep, GYRO, HAS_INERTIAL, HAS_MAG, MAG } from "../../bridge/sweep.ts";
import { Log } from "./log.ts";

const GYRO_SCALE = 17.453 / 32_768;
const ACCEL_SCALE = 78.45 / 32_768;
const MAG_SCALE = 1200 / 32_768;

function helloOf(sensorCount: number): HubHello {
  return {
    tickUs: 0,
    rateHz: 285.714,
    hubSerial: "hub ä",
    sensors: Array.from({ length: sensorCount }, (_, i) => ({
      gyroScale: GYRO_SCALE,
      accelScale: ACCEL_SCALE,
      magScale: MAG_SCALE,
      serial: `unit ${i}`,
    })),
  };
}

function pair(sensorCount: number) {
  const log = new Log();
  const decoder = new NativeDecoder(sensorCount, log);
  const encoder = new NativeEncoder(helloOf(sensorCount));
  return { log, decoder, encoder };
}

test("what is encoded is decoded within half a count, for any number of sensors and any presence", () => {
  const sensors = fc.integer({ min: 1, max: 64 }).chain((count) =>
    fc.record({
      present: fc.array(fc.constantFrom(0, HAS_INERTIAL, HAS_MAG, HAS_INERTIAL | HAS_MAG), {
        minLength: count,
        maxLength: count,
      }),
      status: fc.uint8Array({ minLength: count, maxLength: count }),
      // Share of full scale, per channel.
      shares: fc.array(fc.double({ min: -1, max: 1, noNaN: true }), {
        minLength: count * CHANNELS,
        maxLength: count * CHANNELS,
      }),
      tickUs: fc.nat(0xffff_ffff),
    }),
  );
  const scaleOf = (channel: number) =>
    Math.fround(channel < ACCEL ? GYRO_SCALE : channel < MAG ? ACCEL_SCALE : MAG_SCALE);
  fc.assert(
    fc.property(sensors, ({ present, status, shares, tickUs }) => {
      const { log, decoder, encoder } = pair(present.length);
      const sweep = createSweep(present.length);
      sweep.tickUs = tickUs;
      sweep.present.set(present);
      sweep.readStatus.set(status);
      shares.forEach((share, i) => {
        sweep.raw[i] = share * FULL_SCALE_COUNTS * scaleOf(i % CHANNELS);
      });
      decoder.push(encoder.hello(0), 0);
      decoder.push(encoder.sweep(sweep), 0);
      const [out] = log.sweeps;
      expect(out.tickUs).toBe(tickUs);
      expect(out.present).toEqual(sweep.present);
      expect(out.readStatus).toEqual(sweep.readStatus);
      out.raw.forEach((value, i) => {
        const channel = i % CHANNELS;
        const bit = channel < MAG ? HAS_INERTIAL : HAS_MAG;
        if ((present[Math.floor(i / CHANNELS)] & bit) === 0) return;
        // Half a count is what rounding costs; the margin is for the division's own rounding.
        expect(Math.abs(value - sweep.raw[i])).toBeLessThanOrEqual(0.5000001 * scaleOf(channel));
      });
    }),
    { numRuns: 60 },
  );
});

test("a hello comes back as it was given, scales as single precision, rate to the mHz", () => {
  const { log, decoder, encoder } = pair(3);
  decoder.push(encoder.hello(123), 0);
  const sent = helloOf(3);
  expect(log.heard).toEqual([
    [
      "hello",
      {
        ...sent,
        tickUs: 123,
        sensors: sent.sensors.map((s) => ({
          ...s,
          gyroScale: Math.fround(GYRO_SCALE),
          accelScale: Math.fround(ACCEL_SCALE),
          magScale: Math.fround(MAG_SCALE),
        })),
      },
    ],
  ]);
});

test("readings beyond the range are limited to full scale, as a sensor limits them", () => {
  const { log, decoder, encoder } = pair(1);
  const sweep = createSweep(1);
  sweep.present[0] = HAS_INERTIAL;
  sweep.raw.set([1e6, -1e6, 0], GYRO);
  decoder.push(encoder.hello(0), 0);
  decoder.push(encoder.sweep(sweep), 0);
  const scale = Math.fround(GYRO_SCALE);
  expect([...log.sweeps[0].raw.slice(0, 3)]).toEqual([
    FULL_SCALE_COUNTS * scale,
    -(FULL_SCALE_COUNTS + 1) * scale,
    0,
  ]);
});

test("each kind of packet has a sequence of its own, and it wraps at 16 bits", () => {
  const { log, decoder, encoder } = pair(1);
  const sweep = createSweep(1);
  decoder.push(encoder.hello(0), 0);
  for (let i = 0; i < 65_537; i++) {
    const frame = encoder.sweep(sweep);
    if (i < 2 || i > 65_534) decoder.push(frame, 0);
    if (i === 0) encoder.status({ tickUs: 0, supplyV: 5, temperatureC: 20, faults: 0 });
  }
  expect(log.sweeps.map((s) => s.sequence)).toEqual([0, 1, 65_535, 0]);
});

test("status, reference, sync and button come back", () => {
  const { log, decoder, encoder } = pair(1);
  const sent = [
    ["status", { tickUs: 1, supplyV: 4.871, temperatureC: -3.25, faults: 9 }],
    ["reference", { tickUs: 2, yaw: 0.5, sway: -0.125 }],
    ["sync", { tickUs: 3, edge: 4_000_000_000 }],
    ["button", { tickUs: 0xffff_ffff, button: 2 }],
  ] as const;
  decoder.push(encoder.status(sent[0][1]), 0);
  decoder.push(encoder.reference(sent[1][1]), 0);
  decoder.push(encoder.sync(sent[2][1]), 0);
  decoder.push(encoder.button(sent[3][1]), 0);
  expect(log.heard).toEqual(sent);
});

test("serial numbers longer than 255 bytes are cut, at a whole character", () => {
  const { log, decoder } = pair(1);
  const [sensor] = helloOf(1).sensors;
  const hello = { ...helloOf(1), sensors: [{ ...sensor, serial: "ä".repeat(200) }] };
  decoder.push(new NativeEncoder(hello).hello(0), 0);
  expect((log.heard[0][1] as HubHello).sensors[0].serial).toBe("ä".repeat(127));
});

test.each([0, 65])("a hub of %i sensors is refused", (count) => {
  expect(() => new NativeEncoder(helloOf(count))).toThrow(BendwatchError);
});
