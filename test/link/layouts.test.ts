/** The layouts shipped in config/layouts, each on packets written out byte by byte (checksums by a few lines of Python). */
import { expect, test } from "vitest";
import { DeclaredDecoder } from "../../bridge/link/declared.ts";
import { compileLayout } from "../../bridge/link/declared-compile.ts";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../../bridge/numeric/units.ts";
import { loadConfig } from "../../bridge/rig/load.ts";
import { packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";
import {
  CONDITION,
  HAS_ACCEL,
  HAS_GYRO,
  HAS_INERTIAL,
  HAS_MAG,
  HAS_ORIENTATION,
} from "../../bridge/sweep.ts";
import { hex, join, Log, pushCut } from "./log.ts";

function decoderOf(layout: string, sensorCount: number) {
  const compiled = compileLayout(loadConfig("layouts", layout, packetLayoutSchema), sensorCount);
  return (bytes: Uint8Array, cuts: readonly number[] = []) => {
    const log = new Log();
    const decoder = new DeclaredDecoder(compiled, sensorCount, log);
    pushCut(decoder, bytes, cuts);
    return { ...decoder.counters, heard: log.heard, sweeps: log.sweeps, kinds: log.kinds };
  };
}

function expectSameWhereverCut(decode: ReturnType<typeof decoderOf>, bytes: Uint8Array): void {
  const whole = decode(bytes);
  for (let cut = 1; cut < bytes.length; cut++) expect(decode(bytes, [cut]).heard).toEqual(whole.heard);
}

/** Equal but for the rounding of a product of a few doubles. */
function expectClose(found: Float64Array, expected: readonly number[]): void {
  expect(found.length).toBe(expected.length);
  expected.forEach((value, i) => {
    expect(found[i]).toBeCloseTo(value, 12);
  });
}

const SLIP_READINGS = hex(
  "01 02 01 db dd db dc 00 00" +
    ["64 00", "c8 00", "2c 01", "90 01", "f4 01"]
      .map((x) => `${x} 38 ff 00 40 00 00 00 f8 00 10 00 40 00 00 00 00 00 e0`)
      .join("") +
    `${"00 80".repeat(10)} 00 00 00 00 00 07 92 1d c0`,
);
const SLIP_HOUSEKEEPING = hex("02 40 4b 4c 00 18 10 dd ff 7d 3f c0");

test("slip-ring: all sensors in one packet, quaternions, missing readings, housekeeping", () => {
  const bytes = join(SLIP_READINGS, SLIP_HOUSEKEEPING);
  const result = decoderOf("slip-ring", 6)(bytes);
  expect(result).toMatchObject({ good: 2, discardedBytes: 0, kinds: ["sweep", "status"] });
  const [sweep] = result.sweeps;
  expect([sweep.sequence, sweep.tickUs]).toEqual([258, 0xc0db]);
  const all = HAS_INERTIAL | HAS_ORIENTATION;
  expect([...sweep.present]).toEqual([all, all, all, all, all, 0]);
  expect([...sweep.readStatus]).toEqual([0, 0, 0, 0, 0, 7]);
  expect([...sweep.conditions]).toEqual([0, 0, 0, 0, 0, CONDITION.READ_FAILED]);
  const degrees = [100, -200, 16_384].map((count) => (count * 1000) / 32_768);
  expectClose(sweep.raw.subarray(0, 6), [
    ...degrees.map((value) => value * RAD_PER_DEG),
    0,
    -0.5 * STANDARD_GRAVITY,
    STANDARD_GRAVITY,
  ]);
  expect([...sweep.onBoard.subarray(4, 8)]).toEqual([1, 0, 0, -0.5]);
  expect(result.heard[1][1]).toEqual({ tickUs: 5_000_000, supplyV: 4.12, temperatureC: -3.5, faults: 0 });
  expectSameWhereverCut(decoderOf("slip-ring", 6), bytes);
});

const BENCH = [
  "a5 5a 2d ff fa fb 1e 09 00 03 00 0a ff ec 00 1e 03 e8 fe 0c 00 fa 00 c8 fe 70 00 64 03 84 00 00 00 00 00 00 00 00 fc 18 7f ff 00 00 00 00 17 7d",
  "a5 5a 2d 00 04 00 32 0a 02 01 00 00 00 00 00 00 00 00 00 00 03 e8 00 00 00 00 01 c2 00 07 00 07 00 07 00 07 00 07 00 07 00 01 00 02 00 03 88 c5",
  "a5 5a 2d 00 0e 00 32 0a 02 01 00 00 00 00 00 00 00 00 00 00 03 e8 00 00 00 00 01 c2 00 07 00 07 00 07 00 07 00 07 00 07 00 01 00 02 00 03 9a d7",
].map(hex);

test("bench-hub: big-endian, signs turned, presence bits, a tick that wraps, drive angle, pulse and button", () => {
  const bytes = join(hex("a5 5a a5"), ...BENCH);
  const result = decoderOf("bench-hub", 2)(bytes);
  expect(result).toMatchObject({ good: 3, discardedBytes: 3 });
  expect(result.kinds).toEqual([
    "reference",
    "sweep",
    "reference",
    "sync",
    "button",
    "sweep",
    "reference",
    "sweep",
  ]);
  const [first, second, third] = result.sweeps;
  // 65530 ms, then 4 and 14 on a counter that starts over at 65536.
  expect([first.tickUs, second.tickUs, third.tickUs]).toEqual([65_530_000, 65_540_000, 65_550_000]);
  expect([...first.present]).toEqual([HAS_INERTIAL | HAS_MAG, HAS_INERTIAL]);
  expect([...second.present]).toEqual([HAS_INERTIAL | HAS_MAG, HAS_MAG]);
  expectClose(first.raw.subarray(0, 9), [
    1 * RAD_PER_DEG,
    2 * RAD_PER_DEG,
    -3 * RAD_PER_DEG,
    STANDARD_GRAVITY,
    0.5 * STANDARD_GRAVITY,
    -0.25 * STANDARD_GRAVITY,
    20,
    40,
    -10,
  ]);
  const [, reference] = result.heard[0] as [string, { tickUs: number; yaw: number; sway: number }];
  expect(reference.yaw).toBeCloseTo(-12.5 * RAD_PER_DEG, 12);
  expect(reference.sway).toBeNaN();
  expect(result.heard[3]).toEqual(["sync", { tickUs: 65_540_000, edge: 10 }]);
  expect(result.heard[4]).toEqual(["button", { tickUs: 65_540_000, button: 2 }]);
  expectSameWhereverCut(decoderOf("bench-hub", 2), bytes);
});

test("bench-hub: a packet with a wrong byte is lost alone, the one behind it is found", () => {
  const damaged = BENCH[1].slice();
  damaged[20] ^= 0x10;
  const result = decoderOf("bench-hub", 2)(join(BENCH[0], damaged, BENCH[2]));
  expect(result).toMatchObject({ good: 2, badChecksum: 1, discardedBytes: 48 });
});

const LINES = `$S,812,11,90,0,-180,0.5,0,1,21.0,-3.5,44.0*45
$S,812,21,1,2,3,0,0,-1,,,*6B
$B,815,11.4*64
$S,822,12,4,5,6,0,1,0,1,2,3*72
$S,832,99,4,5,6,0,1,0,1,2,3*70
$S,832,11,4,5,6,0,1,0,1,2,3*71
$S,832,11,4,5,6,0,1,0,1,2,3*70
`;

test("sensor-lines: lines with one tick make one sweep, passed on when the next begins", () => {
  const bytes = Buffer.from(LINES);
  const result = decoderOf("sensor-lines", 3)(bytes);
  expect(result.kinds).toEqual(["status", "sweep", "sweep"]);
  // Refused: address 99. Wrong checksum: the sixth line.
  expect(result).toMatchObject({ good: 5, notUnderstood: 1, badChecksum: 1, discardedBytes: 2 * 31 });
  const [first, second] = result.sweeps;
  expect([first.tickUs, first.sequence]).toEqual([812_000, -1]);
  expect([...first.present]).toEqual([HAS_INERTIAL | HAS_MAG, 0, HAS_GYRO | HAS_ACCEL]);
  expectClose(first.raw.subarray(0, 9), [
    Math.PI / 2,
    0,
    -Math.PI,
    0.5 * STANDARD_GRAVITY,
    0,
    STANDARD_GRAVITY,
    21,
    -3.5,
    44,
  ]);
  expect([...second.present]).toEqual([0, HAS_INERTIAL | HAS_MAG, 0]);
  expect(result.heard[0][1]).toEqual({ tickUs: 815_000, supplyV: 11.4, temperatureC: Number.NaN, faults: 0 });
  expectSameWhereverCut(decoderOf("sensor-lines", 3), bytes);
});
