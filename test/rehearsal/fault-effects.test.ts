import { beforeAll, expect, test } from "vitest";
import { loadRig } from "../../bridge/rig/load.ts";
import { ACCEL, CHANNELS, GYRO, HAS_INERTIAL, MAG } from "../../bridge/sweep.ts";
import { type Decoded, type KeptSweep, rehearse } from "./decoded.ts";

const RIG = loadRig("ribbon-foil");
const RATE_HZ = RIG.hub.rateHz;
const SENSORS = RIG.sensors.length;
const DURATION_S = 12;
const S4 = 3;

const run = (...faults: string[]) => rehearse({ rig: RIG, durationS: DURATION_S, faults });

let healthy: Decoded;
beforeAll(async () => {
  healthy = await run();
});

const secondsOf = (sweep: KeptSweep) => sweep.tickUs / 1e6;
const reading = (sweep: KeptSweep, sensor: number, part: number) =>
  sweep.raw.subarray(sensor * CHANNELS + part, sensor * CHANNELS + part + 3);

/** Which numbers differ from the healthy run in a sweep that both have, as flat indices. */
function differing(sweep: KeptSweep): number[] {
  const same = healthy.sweeps[Math.round(secondsOf(sweep) * RATE_HZ)];
  expect(same.tickUs).toBe(sweep.tickUs);
  return Array.from(sweep.raw.keys()).filter((i) => sweep.raw[i] !== same.raw[i]);
}

/** Holds that all differences lie within [from, to) s and among the given numbers of one sensor. */
function expectOnly(
  decoded: Decoded,
  sensor: number,
  axes: readonly number[],
  [fromS, toS]: [number, number],
): void {
  const allowed = new Set(axes.map((axis) => sensor * CHANNELS + axis));
  let changed = 0;
  for (const sweep of decoded.sweeps) {
    const different = differing(sweep);
    for (const i of different) expect(allowed.has(i)).toBe(true);
    if (different.length === 0) continue;
    changed++;
    expect(secondsOf(sweep)).toBeGreaterThanOrEqual(fromS);
    expect(secondsOf(sweep)).toBeLessThan(toS);
  }
  expect(changed).toBeGreaterThan(10);
  expect(decoded.sweeps.length).toBe(healthy.sweeps.length);
}

test("a healthy rehearsal delivers every sweep whole", () => {
  // The last sweep may still be on its way when the rehearsal ends.
  expect(healthy.sweeps.length).toBeGreaterThanOrEqual(DURATION_S * RATE_HZ - 1);
  expect(healthy.counters.badChecksum).toBe(0);
  for (const sweep of healthy.sweeps) {
    expect([...sweep.present].every((bits) => (bits & HAS_INERTIAL) === HAS_INERTIAL)).toBe(true);
  }
});

test("magnet: tens of µT on one unit's magnetometer, ramped in and out, nothing else", async () => {
  const decoded = await run("magnet:S4@6+2");
  expectOnly(decoded, S4, [6, 7, 8], [6, 8.3]); // it takes 0.3 s to be carried away
  const middle = 7 * RATE_HZ;
  const [here, there] = [decoded, healthy].map(({ sweeps }) => reading(sweeps[middle], S4, MAG));
  expect(Math.hypot(...here.map((v, i) => v - there[i]))).toBeGreaterThan(30);
  expect(Math.hypot(...here.map((v, i) => v - there[i]))).toBeLessThan(60);
});

test("field: the magnetometers of all units change alike, nothing else", async () => {
  const decoded = await run("field@6+2");
  for (const sweep of decoded.sweeps) {
    for (const i of differing(sweep)) expect(i % CHANNELS).toBeGreaterThanOrEqual(MAG);
  }
  const middle = 7 * RATE_HZ;
  for (let sensor = 0; sensor < SENSORS; sensor++) {
    const [here, there] = [decoded, healthy].map(({ sweeps }) => reading(sweeps[middle], sensor, MAG));
    const change = Math.hypot(...here.map((v, i) => v - there[i]));
    expect(Math.abs(change - Math.hypot(16, 9, 12))).toBeLessThan(0.1); // two roundings to counts of 0.037 µT
  }
});

test("saturation: one unit's gyro is at full scale for much of the time, and gravity is still felt whole", async () => {
  const decoded = await run("saturation:S4@6+3");
  expectOnly(decoded, S4, [0, 1, 2, 3, 4, 5, 6, 7, 8], [6, 9.25]);
  const during = decoded.sweeps.filter((s) => secondsOf(s) >= 6.5 && secondsOf(s) < 9);
  const full = during.filter((s) => Math.abs(reading(s, S4, GYRO)[2]) >= 0.9999 * 1000 * (Math.PI / 180));
  // A sine of 1.5 times full scale is beyond it for 1 - asin(1/1.5) / 90 deg = 54 % of the time; the body adds its own.
  expect(full.length / during.length).toBeGreaterThan(0.4);
  expect(full.length / during.length).toBeLessThan(0.65);
  for (const sweep of during) {
    const [here, there] = [sweep, healthy.sweeps[Math.round(secondsOf(sweep) * RATE_HZ)]].map((s) =>
      Math.hypot(...reading(s, S4, ACCEL)),
    );
    // The unit turns in place: only its bias of up to 0.2 m/s² per axis adds differently to a turned force.
    expect(Math.abs(here - there)).toBeLessThan(0.5);
  }
});

test("flattop: one unit's gyro stays within a limit well below full scale and sits at it, nothing else", async () => {
  const decoded = await run("flattop:S4@6+3");
  expectOnly(decoded, S4, [0, 1, 2], [6, 9]);
  const rates = (d: Decoded) =>
    d.sweeps
      .filter((s) => secondsOf(s) >= 6 && secondsOf(s) < 9)
      .map((s) => Math.abs(reading(s, S4, GYRO)[2]));
  const limit = Math.max(...rates(decoded));
  expect(limit).toBeLessThan(0.7 * Math.max(...rates(healthy)));
  expect(rates(decoded).filter((rate) => rate === limit).length).toBeGreaterThan(60);
});

test("stuck: one axis repeats one value, nothing else", async () => {
  const decoded = await run("stuck:S4.gz@6+2");
  expectOnly(decoded, S4, [2], [6, 8]);
  const values = decoded.sweeps
    .filter((s) => secondsOf(s) >= 6 && secondsOf(s) < 8)
    .map((s) => reading(s, S4, GYRO)[2]);
  expect(new Set(values).size).toBe(1);
});

test("loose: one unit's readings are absent in short runs, the rest arrive unchanged", async () => {
  const decoded = await run("loose:S4@4+6");
  const absent = decoded.sweeps.filter((s) => s.present[S4] === 0);
  expect(absent.length).toBeGreaterThan(0.15 * 600);
  expect(absent.length).toBeLessThan(0.6 * 600);
  let longest = 0;
  let runLength = 0;
  for (const sweep of decoded.sweeps) {
    const second = secondsOf(sweep);
    if (second < 4 || second >= 10) expect(sweep.present[S4]).not.toBe(0);
    runLength = sweep.present[S4] === 0 ? runLength + 1 : 0;
    longest = Math.max(longest, runLength);
    for (const i of differing(sweep)) expect(Math.floor(i / CHANNELS)).toBe(S4); // absent rows keep their last value
  }
  expect(longest).toBeLessThanOrEqual(16); // 0.15 s at 100 sweeps a second
});

test("unreadable: the hub says it cannot read one unit", async () => {
  const decoded = await run("unreadable:S4@6+1");
  for (const sweep of decoded.sweeps) {
    const during = secondsOf(sweep) >= 6 && secondsOf(sweep) < 7;
    expect(sweep.readStatus[S4]).toBe(during ? 1 : 0);
    expect(sweep.present[S4] === 0).toBe(during);
  }
});

test("loss and burst: sweeps are missing and the sequence says so; the others are unchanged", async () => {
  for (const [fault, least, most] of [
    ["loss@4+6", 0.06 * 600, 0.14 * 600], // 600 draws at 0.1: four standard deviations either side
    ["burst@6+0.3", 30, 30],
  ] as const) {
    const decoded = await run(fault);
    const missing = healthy.sweeps.length - decoded.sweeps.length;
    expect(missing).toBeGreaterThanOrEqual(least);
    expect(missing).toBeLessThanOrEqual(most);
    expect(decoded.counters.badChecksum).toBe(0);
    expect(decoded.references.length).toBe(healthy.references.length);
    for (const sweep of decoded.sweeps) {
      expect(differing(sweep)).toEqual([]);
      expect(sweep.sequence).toBe(Math.round(secondsOf(sweep) * RATE_HZ));
    }
  }
});

test("corrupt: bytes differ on the wire in about one packet in five, as many as were sent", async () => {
  const decoded = await run("corrupt@4+6");
  expect(decoded.bytes.length).toBe(healthy.bytes.length);
  const different = decoded.bytes.filter((byte, i) => byte !== healthy.bytes[i]).length;
  // 6 s of some 151 packets a second, a fifth of them, two flips each on average.
  expect(different).toBeGreaterThan(0.1 * 900);
  expect(different).toBeLessThan(0.6 * 1000);
  expect(decoded.counters.badChecksum).toBeGreaterThan(0.1 * 900);
  for (const sweep of decoded.sweeps) expect(differing(sweep)).toEqual([]);
});

test("silence: no bytes at all, while the hub goes on counting", async () => {
  const decoded = await run("silence@6+2");
  const gap = decoded.sweeps.findIndex((s) => secondsOf(s) >= 6);
  expect(secondsOf(decoded.sweeps[gap])).toBe(8);
  expect(decoded.sweeps[gap].sequence).toBe(800);
  expect(decoded.sweeps[gap].hostTimeMs - decoded.sweeps[gap - 1].hostTimeMs).toBeGreaterThan(1990);
});

test("restart: after the dark time the hub introduces itself and counts from zero", async () => {
  const decoded = await run("restart@6+1.5");
  const first = decoded.sweeps.findIndex((s, i) => i > 0 && s.tickUs < decoded.sweeps[i - 1].tickUs);
  expect(decoded.sweeps[first].sequence).toBe(0);
  expect(decoded.sweeps[first].tickUs).toBe(0);
  expect(decoded.sweeps[first - 1].tickUs).toBe(5_990_000);
  expect(decoded.hellos.filter((hello) => hello.tickUs === 0).length).toBe(2);
});
