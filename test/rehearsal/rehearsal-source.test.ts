import { expect, test } from "vitest";
import { rotate } from "../../bridge/numeric/quaternion.ts";
import { type RehearsalClock, RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { EARTH_FIELD_UT } from "../../bridge/rehearsal/simulated-rig.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import { CHANNELS, HAS_MAG, MAG } from "../../bridge/sweep.ts";
import { rehearse } from "./decoded.ts";

const FOIL = loadRig("ribbon-foil");
const DUMMY = loadRig("long-dummy");

const ALL_FAULTS = [
  "magnet:S2@3+2",
  "loose:S3@4+2",
  "saturation:S4@5+1",
  "loss@6+1",
  "corrupt@7+1",
  "silence@8+0.3",
  "restart@9+0.3",
];

/** A clock that is exactly as late as it is asked to wait. */
function fakeClock(): RehearsalClock & { waited: number[] } {
  let nowMs = 1_000_000;
  const waited: number[] = [];
  return {
    waited,
    now: () => nowMs,
    wait: async (ms) => {
      waited.push(ms);
      nowMs += ms;
    },
  };
}

const noSink = { bytes: () => {}, linkState: () => {}, mark: () => {} };

test("the same seed gives the same bytes at the same times, another seed others", async () => {
  const options = { rig: FOIL, durationS: 10, faults: ALL_FAULTS };
  const [first, again, other] = [
    await rehearse({ ...options, seed: 4 }),
    await rehearse({ ...options, seed: 4 }),
    await rehearse({ ...options, seed: 5 }),
  ];
  expect(Buffer.compare(first.bytes, again.bytes)).toBe(0);
  expect(first.chunks).toEqual(again.chunks);
  expect(first.sweeps.map((s) => s.hostTimeMs)).toEqual(again.sweeps.map((s) => s.hostTimeMs));
  expect(Buffer.compare(first.bytes, other.bytes)).not.toBe(0);
});

test("asking for the truth changes no byte", async () => {
  const source = new RehearsalSource({ rig: FOIL, rate: "max", startMs: 0, durationS: 3 });
  const parts: Uint8Array[] = [];
  await source.run({
    ...noSink,
    bytes: (chunk) => {
      parts.push(chunk.slice());
      source.truthAt(1.234);
    },
  });
  const plain = await rehearse({ rig: FOIL, durationS: 3 });
  expect(Buffer.compare(Buffer.concat(parts), plain.bytes)).toBe(0);
});

test("the hub introduces itself at once and each second, with the rig's rate and the models' scales", async () => {
  const { hellos, statuses, states } = await rehearse({ rig: DUMMY, durationS: 4.5 });
  expect(hellos.map((hello) => hello.tickUs)).toEqual([0, 1e6, 2e6, 3e6, 4e6]);
  expect(hellos[0].rateHz).toBe(200);
  const degPerCount = (hellos[0].sensors[0].gyroScale * 180) / Math.PI;
  expect(Math.abs(degPerCount / (1000 / 32_768) - 1)).toBeLessThan(1e-7); // announced in single precision
  expect(statuses.map((status) => status.tickUs)).toEqual(Array.from({ length: 9 }, (_, i) => i * 5e5));
  expect(statuses[1].supplyV).toBeGreaterThan(4.5);
  expect(states).toEqual(["open", "ended"]);
});

test("sweeps are evenly spaced and ticks wrap past 2^32 µs", async () => {
  const { sweeps } = await rehearse({ rig: DUMMY, durationS: 3, firstTickUs: 2 ** 32 - 1_000_000 });
  sweeps.slice(1).forEach((sweep, i) => {
    expect((sweep.tickUs - sweeps[i].tickUs + 2 ** 32) % 2 ** 32).toBe(5000);
    expect(sweep.sequence).toBe(i + 1);
  });
  expect(sweeps[200].tickUs).toBe(0);
});

test("magnetometers slower than the hub are in every second sweep", async () => {
  const { sweeps } = await rehearse({ rig: DUMMY, durationS: 1 });
  sweeps.forEach((sweep, i) => {
    for (const bits of sweep.present) expect((bits & HAS_MAG) !== 0).toBe(i % 2 === 0);
  });
});

test("chunks cut packets anywhere and arrive as soon as the port can carry them", async () => {
  const { chunks, sweeps, counters, bytes } = await rehearse({ rig: DUMMY, durationS: 5 });
  const byteMs = 1000 / 92_160;
  expect(Math.max(...chunks)).toBeLessThanOrEqual(Math.ceil(4 / byteMs));
  expect(counters.badChecksum).toBe(0);
  let end = 0;
  let cut = 0;
  for (const length of chunks) {
    end += length;
    if (bytes[end - 1] !== 0) cut++;
  }
  expect(cut).toBeGreaterThan(chunks.length / 4);
  for (const sweep of sweeps) {
    const delayMs = sweep.hostTimeMs - sweep.tickUs / 1000;
    // A sweep without magnetometers is 225 bytes; at the latest a hello and a sweep (some 530 bytes) and a chunk.
    expect(delayMs).toBeGreaterThan(224 * byteMs);
    expect(delayMs).toBeLessThan(550 * byteMs + 4);
  }
});

test("a port too slow for the rig loses packets, and the hub's status says so", async () => {
  const slow: Rig = { ...DUMMY, hub: { ...DUMMY.hub, baudRate: 115_200 } };
  const { sweeps, statuses, counters } = await rehearse({ rig: slow, durationS: 10 });
  expect(sweeps.length).toBeLessThan(600);
  expect(counters.badChecksum).toBe(0);
  expect(statuses.some((status) => (status.faults & 4) !== 0)).toBe(true);
});

test("a foil's drive reference is the nose's own yaw and sway", async () => {
  const { references, source } = await rehearse({ rig: FOIL, durationS: 8 });
  expect(references.length).toBeGreaterThanOrEqual(399);
  const sways = references.filter((r) => r.tickUs > 6e6).map((r) => r.sway);
  // Carangiform nose: 0.02 L either way; fifty looks a second miss a crest at 1.1 Hz by at most 0.24 %.
  expect(Math.max(...sways) / (0.02 * 0.64)).toBeGreaterThan(0.9976);
  expect(Math.max(...sways) / (0.02 * 0.64)).toBeLessThanOrEqual(1.000001);
  expect([...source.truthAt(5).midline.subarray(0, 3)].every((v) => Math.abs(v) < 1e-15)).toBe(true);
  expect((await rehearse({ rig: DUMMY, durationS: 1 })).references).toEqual([]);
});

test("camera pulses come when asked for, counted", async () => {
  const { edges } = await rehearse({ rig: FOIL, durationS: 1.001, syncHz: 50 });
  expect(edges.slice(0, 3)).toEqual([0, 1, 2].map((edge) => ({ edge, tickUs: 20_000 * edge })));
  expect(edges.length).toBeGreaterThanOrEqual(50);
});

test("turned to earth by the true orientations, every reading of the field is the earth's", async () => {
  const { sweeps, source } = await rehearse({ rig: FOIL, durationS: 8 });
  const earth = new Float64Array(3);
  let sum = 0;
  let count = 0;
  for (const sweep of sweeps) {
    const { orientations } = source.truthAt(sweep.tickUs / 1e6);
    for (let sensor = 0; sensor < 6; sensor++) {
      rotate(earth, orientations, sweep.raw, 0, 4 * sensor, CHANNELS * sensor + MAG);
      const off = Math.hypot(...earth.map((v, axis) => v - EARTH_FIELD_UT[axis]));
      expect(off).toBeLessThan(0.4 * 6); // six sigma of the model's noise, over three axes
      sum += off * off;
      count += 3;
    }
  }
  expect(Math.sqrt(sum / count)).toBeCloseTo(0.4, 2); // 14 000 readings: half a per cent, and rounding's 0.0002
});

test("live, chunks are delivered when due on the clock and stamped with it", async () => {
  for (const rate of [1, 4]) {
    const clock = fakeClock();
    const startMs = clock.now();
    const stamps: number[] = [];
    const source = new RehearsalSource({ rig: FOIL, durationS: 2, rate, clock });
    await source.run({ ...noSink, bytes: (_chunk, hostTimeMs) => stamps.push(hostTimeMs) });
    expect(stamps[0]).toBeCloseTo(startMs + 4 / rate, 6);
    expect(clock.now()).toBeCloseTo(startMs + 2000 / rate, 6);
    expect(stamps.every((stamp, i) => i === 0 || stamp > stamps[i - 1])).toBe(true);
    expect(Math.max(...clock.waited)).toBeLessThanOrEqual(4 / rate + 1e-6);
  }
});

test("an endless rehearsal stops when asked, at full speed too", async () => {
  for (const rate of [1, "max"] as const) {
    const source = new RehearsalSource({ rig: FOIL, rate });
    const states: string[] = [];
    let chunks = 0;
    let stopped: Promise<void> | undefined;
    await source.run({
      ...noSink,
      linkState: (state) => states.push(state),
      bytes: () => {
        if (++chunks === 3) stopped = source.stop();
      },
    });
    await stopped;
    expect(chunks).toBe(3);
    expect(states).toEqual(["open", "ended"]);
  }
});

test("at full speed others get their turns", async () => {
  const source = new RehearsalSource({ rig: FOIL, rate: "max", durationS: 600 });
  let turns = 0;
  let running = true;
  const run = source.run(noSink).then(() => {
    running = false;
  });
  while (running) {
    await new Promise((resolve) => setImmediate(resolve));
    turns++;
    if (turns === 5) await source.stop(); // ten minutes of rehearsal take far longer than five turns
  }
  await run;
  expect(turns).toBeGreaterThanOrEqual(5);
});

test("a fault, an amplitude or a rate that cannot be is refused at once", () => {
  expect(() => new RehearsalSource({ rig: FOIL, faults: ["magnet:S9@1+1"] })).toThrow(/COMMAND_INVALID/);
  expect(() => new RehearsalSource({ rig: FOIL, swimmer: { amplitude: 5 } })).toThrow(/COMMAND_INVALID/);
  expect(() => new RehearsalSource({ rig: FOIL, rate: 0 })).toThrow(/MISUSE/);
});
