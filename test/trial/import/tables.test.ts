import fc from "fast-check";
import { describe, expect, test } from "vitest";
import type { PacketSink } from "../../../bridge/link/packets.ts";
import { encodeTextLine, TextLineDecoder } from "../../../bridge/link/text.ts";
import { HAS_INERTIAL, HAS_MAG } from "../../../bridge/sweep.ts";
import { IMPORT_EPOCH_MS } from "../../../bridge/trial/import/sweep-lines.ts";
import { checkTables, importedRig, importTables } from "../../../bridge/trial/import/tables.ts";
import { HEADER, imported, mapOf, NINE_AXIS, rigOf, row, tableOf } from "./fixtures.ts";

const ALL = HAS_INERTIAL | HAS_MAG;

describe("a wide table", () => {
  test("becomes one sweep a row, with tick, host time and values", async () => {
    const { sweeps } = await imported(
      [tableOf(`${HEADER}\n${row(0.5)}\n${row(0.51, 2)}\n`)],
      mapOf(),
      rigOf(1),
    );
    expect(sweeps).toEqual([
      {
        sequence: 0,
        tickUs: 500_000,
        hostTimeMs: IMPORT_EPOCH_MS + 500,
        present: [ALL],
        raw: [1, 2, 3, 4, 5, 6, 7, 8, 9],
      },
      {
        sequence: 1,
        tickUs: 510_000,
        hostTimeMs: IMPORT_EPOCH_MS + 510,
        present: [ALL],
        raw: [2, 4, 6, 8, 10, 12, 14, 16, 18],
      },
    ]);
  });

  test("missing rows of regular data leave a hole in the sequence", async () => {
    const times = [0, 1, 2, 3, 6, 7, 8, 9].map((i) => row((i / 100).toFixed(2)));
    const { sweeps, summary } = await imported([tableOf([HEADER, ...times].join("\n"))], mapOf(), rigOf(1));
    expect(sweeps.map(({ sequence }) => sequence)).toEqual([0, 1, 2, 3, 6, 7, 8, 9]);
    expect(summary).toMatchObject({ sweeps: 8, lostSweeps: 2, regular: true, startS: 0, spanS: 0.09 });
    expect(summary.rateHz).toBeCloseTo(100, 9);
  });

  test("irregular times are kept and the sequence only counts", async () => {
    const times = [0, 0.013, 0.02, 0.08, 0.1, 0.104].map((time) => row(time));
    const { sweeps, summary } = await imported([tableOf([HEADER, ...times].join("\n"))], mapOf(), rigOf(1));
    expect(sweeps.map(({ tickUs }) => tickUs)).toEqual([0, 13_000, 20_000, 80_000, 100_000, 104_000]);
    expect(sweeps.map(({ sequence }) => sequence)).toEqual([0, 1, 2, 3, 4, 5]);
    expect(summary).toMatchObject({ lostSweeps: 0, regular: false });
  });

  test("dated times give true host times and ticks modulo 2^32 µs", async () => {
    const map = mapOf({ time: { column: "t", unit: "iso" } });
    const lines = [HEADER, row("2024-03-01T12:00:00.000Z"), row("2024-03-01T12:00:00.010Z")];
    const { sweeps } = await imported([tableOf(lines.join("\n"))], map, rigOf(1));
    // 1 709 294 400 000 000 µs = 397 976 times 2^32 and 495 407 104 (by bc).
    expect(sweeps.map(({ tickUs }) => tickUs)).toEqual([495_407_104, 495_417_104]);
    expect(sweeps[1]!.hostTimeMs).toBe(Date.parse("2024-03-01T12:00:00.010Z"));
  });
});

describe("one table a sensor", () => {
  const map = mapOf({ arrangement: "file-per-sensor" });
  const a = () => tableOf([HEADER, row(0, 1), row(0.01, 2), row(0.02, 3)].join("\n"));
  const b = () => tableOf([HEADER, row(0.012, 4), row(0.022, 5), row(0.032, 6)].join("\n"));

  test("is joined by time within a third of the interval", async () => {
    const { sweeps, summary } = await imported([a(), b()], map, rigOf(2));
    expect(sweeps.map(({ tickUs }) => tickUs)).toEqual([0, 10_000, 20_000, 32_000]);
    expect(sweeps.map(({ present }) => present)).toEqual([
      [ALL, 0],
      [ALL, ALL],
      [ALL, ALL],
      [0, ALL],
    ]);
    expect(sweeps[1]!.raw[0]).toBe(2);
    expect(sweeps[1]!.raw[9]).toBe(4);
    expect(summary.sensors).toMatchObject([
      { name: "S1", present: 3, held: 0, lost: 0, absent: 1 },
      { name: "S2", present: 3, held: 0, lost: 0, absent: 1 },
    ]);
  });

  test("is joined within the tolerance declared", async () => {
    const { sweeps } = await imported([a(), b()], { ...map, mergeToleranceMs: 1 }, rigOf(2));
    expect(sweeps.map(({ tickUs }) => tickUs)).toEqual([0, 10_000, 12_000, 20_000, 22_000, 32_000]);
  });

  test("goes to the sensor its file names", async () => {
    const { sweeps } = await imported([{ path: a(), sensor: "S2" }, b()], map, rigOf(2));
    expect(sweeps[0]!.present).toEqual([0, ALL]);
  });
});

test("present, held, lost and absent add up to the sweeps for each sensor", async () => {
  const one = [HEADER, row(0), row(0.01), row(0.02, 2), "0.03,,,,,,,,,", "0.04,1,2,3,4,5,6,,,", row(0.05, 3)];
  const two = [HEADER, row(0.02), row(0.03), row(0.04)];
  const map = mapOf({ arrangement: "file-per-sensor", repeated: "held" });
  const { summary } = await imported([tableOf(one.join("\n")), tableOf(two.join("\n"))], map, rigOf(2));
  expect(summary.sensors).toEqual([
    { name: "S1", present: 4, held: 1, lost: 1, absent: 0, without: { gyro: 0, accel: 0, mag: 1 } },
    { name: "S2", present: 1, held: 2, lost: 0, absent: 3, without: { gyro: 0, accel: 0, mag: 0 } },
  ]);
});

test("nothing is written when the last row of the last table is wrong", async () => {
  const good = tableOf([HEADER, row(0), row(0.01)].join("\n"));
  const bad = tableOf([HEADER, row(0), row(0.01), "0.02,1"].join("\n"));
  const written: Uint8Array[] = [];
  const options = {
    files: [{ path: good }, { path: bad }],
    columnMap: mapOf({ arrangement: "file-per-sensor" }),
    rig: rigOf(2),
    encodeLine: encodeTextLine,
  };
  await expect(checkTables(options)).rejects.toThrow("line 4");
  await expect(importTables(options, { bytes: (chunk) => written.push(chunk) })).rejects.toThrow("line 4");
  expect(written).toEqual([]);
});

test("the trial's rig is the given one with the text layout", () => {
  const rig = rigOf(2);
  expect(importedRig(rig)).toEqual({ ...rig, hub: { ...rig.hub, layout: "text" }, packetLayout: null });
  expect(rig.hub.layout).toBe("native");
});

describe("import, then replay", () => {
  const number = fc.double({ noNaN: true, noDefaultInfinity: true });
  const entry = (n: number) => {
    const at = (part: string) => ["x", "y", "z"].map((axis) => `${part}${axis}${n}`);
    return {
      gyro: { ...NINE_AXIS.gyro, columns: at("g") },
      accel: { ...NINE_AXIS.accel, columns: at("a") },
      mag: { ...NINE_AXIS.mag, columns: at("m") },
    };
  };
  const map = mapOf({ time: { column: "t", unit: "us" }, sensors: [entry(1), entry(2)] });
  const header = [
    "t",
    ...map.sensors.flatMap(({ gyro, accel, mag }) => [gyro, accel, mag!].flatMap((p) => p.columns)),
  ];
  const rig = rigOf(2);

  /** What a replay of the imported bytes decodes. */
  async function replayed(path: string) {
    const sweeps: { tickUs: number; present: number[]; raw: number[] }[] = [];
    const sink = {
      sweep: ({ tickUs, present, raw }) => sweeps.push({ tickUs, present: [...present], raw: [...raw] }),
    } as Pick<PacketSink, "sweep"> as PacketSink;
    const decoder = new TextLineDecoder(rig.models, sink);
    const options = { files: [{ path }], columnMap: map, rig, encodeLine: encodeTextLine };
    await importTables(options, { bytes: (chunk, hostTimeMs) => decoder.push(chunk, hostTimeMs) });
    return sweeps;
  }

  test("gives back random numbers exactly, at their times", async () => {
    const values = fc.array(number, { minLength: 18, maxLength: 18 });
    const rows = fc.array(fc.tuple(fc.integer({ min: 1, max: 1e6 }), values), {
      minLength: 1,
      maxLength: 12,
    });
    await fc.assert(
      fc.asyncProperty(rows, async (list) => {
        let tickUs = 0;
        const expected = list.map(([stepUs, raw]) => {
          tickUs += stepUs;
          return { tickUs, present: [ALL, ALL], raw };
        });
        const lines = expected.map((sweep) => [sweep.tickUs, ...sweep.raw.map(textOf)].join(","));
        const path = tableOf([header.join(","), ...lines].join("\n"), "random.csv");
        expect(await replayed(path)).toEqual(expected);
      }),
      { numRuns: 60 },
    );
  });

  test("gives back which parts were missing", async () => {
    const parts = [",,", "1,2,3"];
    const lines = Array.from({ length: 64 }, (_, bits) =>
      [bits, ...Array.from({ length: 6 }, (_, part) => parts[(bits >> part) & 1])].join(","),
    );
    const sweeps = await replayed(tableOf([header.join(","), ...lines].join("\n")));
    expect(sweeps.map(({ present }) => present)).toEqual(
      Array.from({ length: 64 }, (_, bits) => [bits & 7, bits >> 3]),
    );
  });
});

/** As JavaScript writes it; it drops the sign of -0, which is a number of its own to an exact comparison. */
function textOf(value: number): string {
  return Object.is(value, -0) ? "-0" : String(value);
}
