import fc from "fast-check";
import { expect, test } from "vitest";
import { encodeCobs } from "../../bridge/link/cobs.ts";
import { NativeDecoder } from "../../bridge/link/native-decoder.ts";
import { CONDITION, HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG } from "../../bridge/sweep.ts";
import { hex, join, Log, pushCut } from "./log.ts";

// Written by hand; the CRCs by Python's binascii.crc_hqx, which is CRC-16/IBM-3740 when started at 0xFFFF.
/** Two sensors at 100 Hz: scales 0.001 0.005 0.25 and 0.002 0.01 0; serials "A1", "" and hub "H-7". */
const HELLO = hex(
  "03 01 01 01 03 e8 03 01 05 02 a0 86 01 09 6f 12 83 3a 0a d7 a3 3b 01 0b 80 3e 6f 12 03 3b 0a d7 23 3c 01 01 01 04 02 41 31 07 03 48 2d 37 f8 1a 00",
);
/** Sequence 7, tick 2000: both inertial, first magnetometer; second sensor's read status 5. */
const SWEEP = hex(
  "04 01 02 07 03 d0 07 01 04 02 03 01 03 05 01 04 fe ff 03 02 64 05 38 ff d0 07 04 80 ff 7f 01 02 01 02 02 02 03 02 50 07 d8 ff 60 ff d8 79 00",
);
const STATUS = hex("04 01 03 01 03 b8 0b 01 06 74 13 83 ff 04 03 72 f5 00");
const REFERENCE = hex("04 01 04 02 03 a0 0f 01 01 01 03 80 be 01 05 80 3d bc 29 00");
const SYNC = hex("03 01 05 01 03 88 13 01 04 70 11 01 03 37 07 00");
const BUTTON = hex("03 01 06 01 03 70 17 01 04 01 b7 34 00");
const ALL = join(HELLO, SWEEP, STATUS, REFERENCE, SYNC, BUTTON);

function decode(bytes: Uint8Array, cuts: readonly number[] = [], sensorCount = 2) {
  const log = new Log();
  const decoder = new NativeDecoder(sensorCount, log);
  pushCut(decoder, bytes, cuts);
  return {
    ...decoder.counters,
    complaint: decoder.complaint,
    heard: log.heard,
    sweeps: log.sweeps,
    kinds: log.kinds,
  };
}

/** A frame around any payload, with a right CRC. */
function frame(payloadHex: string): Uint8Array {
  const payload = hex(payloadHex);
  let crc = 0xffff;
  for (const byte of payload) {
    crc ^= byte << 8;
    for (let bit = 0; bit < 8; bit++) crc = (crc & 0x8000 ? (crc << 1) ^ 0x1021 : crc << 1) & 0xffff;
  }
  const data = join(payload, Uint8Array.of(crc & 0xff, crc >> 8));
  const out = new Uint8Array(data.length + 10);
  return out.slice(0, encodeCobs(data, data.length, out));
}

test("a hello tells rate, serial numbers and scales", () => {
  const [kind, hello] = decode(HELLO).heard[0];
  expect(kind).toBe("hello");
  expect(hello).toEqual({
    tickUs: 1000,
    rateHz: 100,
    hubSerial: "H-7",
    sensors: [
      { gyroScale: Math.fround(0.001), accelScale: Math.fround(0.005), magScale: 0.25, serial: "A1" },
      { gyroScale: Math.fround(0.002), accelScale: Math.fround(0.01), magScale: 0, serial: "" },
    ],
  });
});

test("a sweep's counts become physical units by the hello's scales", () => {
  const [sweep] = decode(join(HELLO, SWEEP)).sweeps;
  const scale = (counts: number[], by: number) => counts.map((c) => c * Math.fround(by));
  expect(sweep.sequence).toBe(7);
  expect(sweep.tickUs).toBe(2000);
  expect([...sweep.raw.slice(0, 9)]).toEqual([
    ...scale([1, -2, 3], 0.001),
    ...scale([100, -200, 2000], 0.005),
    ...scale([80, -40, -160], 0.25),
  ]);
  expect([...sweep.raw.slice(9, 15)]).toEqual([
    ...scale([-32768, 32767, 0], 0.002),
    ...scale([1, 2, 3], 0.01),
  ]);
  expect([...sweep.present]).toEqual([HAS_INERTIAL | HAS_MAG, HAS_INERTIAL]);
  expect([...sweep.readStatus]).toEqual([0, 5]);
  expect([...sweep.conditions]).toEqual([0, CONDITION.READ_FAILED]);
});

test("the small packets: status, reference, sync edge, button", () => {
  expect(decode(join(STATUS, REFERENCE, SYNC, BUTTON)).heard).toEqual([
    ["status", { tickUs: 3000, supplyV: 4.98, temperatureC: -1.25, faults: 4 }],
    ["reference", { tickUs: 4000, yaw: -0.25, sway: 0.0625 }],
    ["sync", { tickUs: 5000, edge: 70_000 }],
    ["button", { tickUs: 6000, button: 1 }],
  ]);
});

test("cut at every place, and byte by byte, the packets are the same", () => {
  const whole = decode(ALL);
  expect(whole.good).toBe(6);
  expect(whole.discardedBytes).toBe(0);
  for (let cut = 0; cut <= ALL.length; cut++) expect(decode(ALL, [cut])).toEqual(whole);
  expect(
    decode(
      ALL,
      Array.from({ length: ALL.length }, (_, i) => i),
    ),
  ).toEqual(whole);
});

test("a sweep carries the arrival of the chunk that completed it", () => {
  const log = new Log();
  const decoder = new NativeDecoder(2, log);
  decoder.push(HELLO, 1);
  decoder.push(SWEEP.slice(0, 20), 2);
  decoder.push(SWEEP.slice(20), 3);
  expect(log.sweeps[0].hostTimeMs).toBe(3);
});

test("presence, status and conditions are those of the sweep itself; absent rows keep their last value", () => {
  const empty = frame("01 02 08 00 b8 0b 00 00 02 00 00 00 00");
  const [first, second] = decode(join(HELLO, SWEEP, empty)).sweeps;
  expect([...second.present]).toEqual([0, 0]);
  expect([...second.readStatus]).toEqual([0, 0]);
  expect([...second.conditions]).toEqual([0, 0]);
  expect(second.raw).toEqual(first.raw);
});

test("a part that the hello says a sensor lacks is absent, whatever the mask", () => {
  const bothMags = frame("01 02 00 00 00 00 00 00 02 00 03 00 00 01 00 02 00 03 00 04 00 05 00 06 00");
  const [sweep] = decode(join(HELLO, bothMags)).sweeps;
  expect([...sweep.present]).toEqual([HAS_MAG, 0]);
  const gyroOnly = frame("01 01 00 00 00 00 00 00 01 a0 86 01 00 00 00 80 3f 00 00 00 00 00 00 00 00 00 00");
  const one = frame("01 02 00 00 00 00 00 00 01 01 00 00 01 00 02 00 03 00 04 00 05 00 06 00");
  const present = decode(join(gyroOnly, one), [], 1).sweeps[0].present[0];
  expect(present & HAS_GYRO).toBe(HAS_GYRO);
  expect(present & HAS_ACCEL).toBe(0);
});

test("sweeps before the first hello are counted and not passed on", () => {
  const result = decode(join(SWEEP, SWEEP, HELLO, SWEEP));
  expect(result.awaitingHello).toBe(2);
  expect(result.kinds).toEqual(["hello", "sweep"]);
  expect(result.discardedBytes).toBe(2 * SWEEP.length);
});

test("a later hello may change the scales", () => {
  const coarser = frame(
    "01 01 01 00 00 00 00 00 02 a0 86 01 00 00 00 00 3f 00 00 80 3f 00 00 00 40 00 00 00 3f 00 00 80 3f 00 00 00 00 00 00 00",
  );
  const sweep = decode(join(HELLO, SWEEP, coarser, SWEEP)).sweeps[1];
  expect([...sweep.raw.slice(0, 9)]).toEqual([0.5, -1, 1.5, 100, -200, 2000, 160, -80, -320]);
});

test("a hello with another number of sensors is a complaint and withholds sweeps until one fits", () => {
  const three = decode(join(HELLO, SWEEP), [], 3);
  expect(three.complaint).toBe(
    "The hub announces 2 sensors; the rig file has 3. Correct the rig file, or the cabling.",
  );
  expect(three.notUnderstood).toBe(2);
  expect(three.heard).toEqual([]);

  const oneSensor = frame("01 01 00 00 00 00 00 00 01 a0 86 01 00 00 00 80 3f 00 00 80 3f 00 00 80 3f 00 00");
  const changed = decode(join(HELLO, SWEEP, oneSensor, SWEEP, HELLO, SWEEP));
  expect(changed.kinds).toEqual(["hello", "sweep", "hello", "sweep"]);
  expect(changed.awaitingHello).toBe(1);
  expect(changed.complaint).toBeNull();
});

test("another protocol version is a complaint", () => {
  const result = decode(frame("02 03 01 00 b8 0b 00 00 74 13 83 ff 04 00"));
  expect(result.notUnderstood).toBe(1);
  expect(result.complaint).toMatch(/version 2 .* knows version 1/);
});

test.each([
  ["unknown kind", "01 07 00 00 00 00 00 00"],
  ["status one byte short", "01 03 00 00 00 00 00 00 74 13 83 ff 04"],
  ["status one byte long", "01 03 00 00 00 00 00 00 74 13 83 ff 04 00 00"],
  ["reference that is not a number", "01 04 00 00 00 00 00 00 00 00 c0 7f 00 00 00 00"],
  ["sweep without a body", "01 02 00 00 00 00 00 00"],
  ["sweep whose masks promise more than it holds", "01 02 00 00 00 00 00 00 02 01 00 00 00"],
  ["sweep with a presence bit past the last sensor", "01 02 00 00 00 00 00 00 02 04 00 00 00"],
  ["sweep with a byte too many", "01 02 00 00 00 00 00 00 02 00 00 00 00 00"],
  ["hello of no sensors", "01 01 00 00 00 00 00 00 00 a0 86 01 00 00"],
  ["hello cut before the scales", "01 01 00 00 00 00 00 00 02 a0 86 01 00 00 00"],
  ["hello whose serial runs past the end", `01 01 00 00 00 00 00 00 02 a0 86 01 00 ${"00".repeat(24)} 05 41`],
  [
    "hello with a negative scale",
    `01 01 00 00 00 00 00 00 02 a0 86 01 00 00 00 80 bf ${"00".repeat(20)} 00 00 00`,
  ],
  [
    "hello with an infinite scale",
    `01 01 00 00 00 00 00 00 02 a0 86 01 00 00 00 80 7f ${"00".repeat(20)} 00 00 00`,
  ],
])("intact but not understood: %s", (_title, payload) => {
  const bytes = frame(payload);
  const result = decode(join(HELLO, bytes, SWEEP));
  expect(result.notUnderstood).toBe(1);
  expect(result.discardedBytes).toBe(bytes.length);
  expect(result.kinds).toEqual(["hello", "sweep"]);
});

test("any single wrong bit in a frame stops that frame alone", () => {
  for (let bit = 0; bit < SWEEP.length * 8; bit++) {
    const damaged = SWEEP.slice();
    damaged[bit >> 3] ^= 1 << (bit & 7);
    const result = decode(join(HELLO, damaged, STATUS, SWEEP));
    const lostToo = damaged[damaged.length - 1] === 0 ? [] : ["status"];
    expect(result.kinds).toEqual(["hello", "status", "sweep"].filter((kind) => !lostToo.includes(kind)));
    // A first byte that has become 0 is an idle delimiter.
    const idle = damaged[0] === 0 ? 1 : 0;
    const lostBytes = SWEEP.length - idle + (lostToo.length > 0 ? STATUS.length : 0);
    expect(result.discardedBytes).toBe(lostBytes);
  }
});

test("leading noise and a cut-off start cost only themselves", () => {
  const result = decode(join(hex("ff 13 7a"), SWEEP.slice(11), HELLO, SWEEP));
  expect(result.kinds).toEqual(["hello", "sweep"]);
  expect(result.badChecksum).toBe(1);
  expect(result.discardedBytes).toBe(3 + SWEEP.length - 11);
});

test("a cut-off end is neither passed on nor counted until it ends", () => {
  const result = decode(join(HELLO, SWEEP.slice(0, -1)));
  expect(result.kinds).toEqual(["hello"]);
  expect(result.badChecksum + result.discardedBytes).toBe(0);
});

test("an endless frame is over-long once; the next frame is found", () => {
  const result = decode(join(new Uint8Array(100_000).fill(0x55), Uint8Array.of(0), HELLO));
  expect(result.overLong).toBe(1);
  expect(result.discardedBytes).toBe(100_001);
  expect(result.kinds).toEqual(["hello"]);
});

const garbage = fc.uint8Array({ maxLength: 400 });
const pieces = fc.array(fc.oneof(garbage, fc.constantFrom(HELLO, SWEEP, STATUS, SYNC)), { maxLength: 12 });

test("random bytes never throw, and chunking changes nothing", () => {
  fc.assert(
    fc.property(pieces, fc.array(fc.nat(5000), { maxLength: 20 }), (parts, cuts) => {
      const bytes = join(...parts);
      const whole = decode(bytes);
      expect(decode(bytes, cuts)).toEqual(whole);
      expect(whole.bytes).toBe(bytes.length);
    }),
  );
});

test("a valid frame after any garbage that a delimiter ends is found", () => {
  fc.assert(
    fc.property(garbage, (noise) => {
      const { kinds } = decode(join(noise, Uint8Array.of(0), STATUS, BUTTON));
      expect(kinds.slice(-2)).toEqual(["status", "button"]);
    }),
  );
});

test("every byte is in a good packet, counted as discarded, an idle delimiter, or in the frame under way", () => {
  fc.assert(
    fc.property(pieces, (parts) => {
      const bytes = join(...parts, Uint8Array.of(0));
      const result = decode(bytes);
      const sizes: Record<string, number> = {
        hello: HELLO.length,
        sweep: SWEEP.length,
        status: STATUS.length,
        sync: SYNC.length,
      };
      const inGood = result.kinds.reduce((sum, kind) => sum + sizes[kind], 0);
      const idle = bytes.filter((byte, i) => byte === 0 && (i === 0 || bytes[i - 1] === 0)).length;
      expect(inGood + result.discardedBytes + idle).toBe(bytes.length);
    }),
  );
});

test("a million random bytes are all disposed of, no packet among them", () => {
  let state = 1;
  const bytes = Uint8Array.from({ length: 1_000_000 }, () => {
    state = (state * 16_807) % 2_147_483_647;
    return state & 0xff;
  });
  const result = decode(bytes);
  // A 16-bit CRC lets one random frame in 65536 through; this seed has about 3900 frames, and none of them fits a body.
  expect(result.heard).toEqual([]);
  expect(result.badChecksum).toBeGreaterThan(3000);
  expect(result.discardedBytes).toBeGreaterThan(990_000);
});
