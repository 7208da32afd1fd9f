import { describe, expect, test } from "vitest";
import { HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_MAG } from "../../../bridge/sweep.ts";
import { Table } from "../../../bridge/trial/import/table.ts";
import { HEADER, mapOf, rigOf, row, SIX_AXIS, tableOf } from "./fixtures.ts";

const ALL = HAS_INERTIAL | HAS_MAG;

async function read(lines: readonly string[], overrides: Record<string, unknown> = {}, model?: string) {
  const path = tableOf(`${lines.join("\n")}\n`);
  const table = new Table(path, [0], mapOf(overrides), rigOf(1, model));
  const rows = [];
  for await (const { timeUs, values, present, held } of table.read()) {
    rows.push({ timeUs, values: [...values], present: present[0], held: held[0] });
  }
  return { path, table, rows };
}

const presentOf = (rows: { present: number | undefined }[]) => rows.map(({ present }) => present);

describe("rows", () => {
  test("carry their time in µs and their values in SI units", async () => {
    const { rows } = await read([HEADER, row("0.25"), row("0.26", 2)]);
    expect(rows).toEqual([
      { timeUs: 250_000, values: [1, 2, 3, 4, 5, 6, 7, 8, 9], present: ALL, held: 0 },
      { timeUs: 260_000, values: [2, 4, 6, 8, 10, 12, 14, 16, 18], present: ALL, held: 0 },
    ]);
  });

  test("of a table with a constant rate are counted, each time rounded for itself", async () => {
    const lines = [HEADER.slice(2), ...[1, 2, 3, 4].map((value) => row("", value).slice(1))];
    const { rows } = await read(lines, { time: { rateHz: 300 } });
    expect(rows.map(({ timeUs }) => timeUs)).toEqual([0, 3333, 6667, 10_000]);
  });

  test("without a header are read by column numbers", async () => {
    const columns = (first: number) => [first, first + 1, first + 2];
    const { rows } = await read([row(1)], {
      format: { headerRows: 0 },
      time: { column: 1 },
      sensors: [
        {
          gyro: { columns: columns(2), unit: "rad/s" },
          accel: { columns: columns(5), unit: "m/s²" },
          mag: { columns: columns(8), unit: "gauss" },
        },
      ],
    });
    expect(rows[0]!.values).toEqual([1, 2, 3, 4, 5, 6, 700, 800, 900]);
  });

  test("may have empty cells past the header's last column", async () => {
    expect((await read([HEADER, `${row(1)},,`])).rows).toHaveLength(1);
  });
});

describe("held rows", () => {
  const lines = [HEADER, row(1), row(2), row(3, 2), row(4, 2), row(5)];

  test("are no new readings where the map says so", async () => {
    const { rows } = await read(lines, { repeated: "held" });
    expect(rows.map(({ held }) => held)).toEqual([0, 1, 0, 1, 0]);
    expect(presentOf(rows)).toEqual([ALL, 0, ALL, 0, ALL]);
  });

  test("are readings like any other by default", async () => {
    expect(presentOf((await read(lines)).rows)).toEqual([ALL, ALL, ALL, ALL, ALL]);
  });

  test("differ from the row before in no value at all: one changed cell makes a new reading", async () => {
    const { rows } = await read([HEADER, row(1), `${row(2).slice(0, -1)}9.5`], { repeated: "held" });
    expect(presentOf(rows)).toEqual([ALL, ALL]);
  });

  test("that miss the same part are held, and rows that miss everything are lost", async () => {
    const noMag = (time: number) => `${time},1,2,3,4,5,6,,,`;
    const empty = (time: number) => `${time},,,,,,,,,`;
    const { rows } = await read([HEADER, noMag(1), noMag(2), empty(3), empty(4)], { repeated: "held" });
    expect(rows.map(({ held }) => held)).toEqual([0, 1, 0, 0]);
    expect(presentOf(rows)).toEqual([HAS_INERTIAL, 0, 0, 0]);
  });
});

describe("lost parts", () => {
  test.each(["", "NaN", "nan", "-9999"])(
    "a cell %j loses its part in that row and is no bad cell",
    async (cell) => {
      const lines = [
        HEADER,
        `1,${cell},2,3,4,5,6,7,8,9`,
        `2,1,2,3,4,5,${cell},7,8,9`,
        `3,1,2,3,4,5,6,7,${cell},9`,
      ];
      const { rows, table } = await read(lines, { format: { missing: ["-9999"] } });
      expect(presentOf(rows)).toEqual([HAS_ACCEL | HAS_MAG, HAS_GYRO | HAS_MAG, HAS_INERTIAL]);
      expect(table.badCells).toBe(0);
    },
  );

  test("one cell a column that is no number is counted and loses its part", async () => {
    const { rows, table } = await read([HEADER, row(1), "2,1,2,3,4,##,6,7,8,9", row(3)]);
    expect(presentOf(rows)).toEqual([ALL, HAS_GYRO | HAS_MAG, ALL]);
    expect(table.badCells).toBe(1);
  });

  test("more than one in a hundred such cells in a column refuse the table, naming each column", async () => {
    const bad = Array.from({ length: 300 }, (_, i) => (i < 4 ? `${i},1,x,3,4,5,6,7,8,0x${i}` : row(i)));
    await expect(read([HEADER, ...bad])).rejects.toMatchObject({
      code: "TABLE_INVALID",
      details: [
        {
          where: expect.stringContaining(", line 2, column 3 (gy)"),
          found: '"x", the first of 4 such cells in 300 rows',
          expected: "a number with a decimal point",
        },
        {
          where: expect.stringContaining(", line 2, column 10 (mz)"),
          found: expect.stringContaining('"0x0"'),
        },
      ],
    });
    const fewer = bad.map((line, i) => (i === 3 ? row(i) : line));
    expect((await read([HEADER, ...fewer])).table.badCells).toBe(6);
  });

  test("a decimal comma where the map says point is refused, and read where it says comma", async () => {
    const lines = [HEADER, row(1), row(2)].map((line) => line.replaceAll(",", ";").replaceAll("5;", "5,25;"));
    await expect(read(lines, { format: { separator: ";" } })).rejects.toThrow(/decimal point/);
    const { rows } = await read(lines, { format: { separator: ";", decimalMark: "," } });
    expect(rows[0]!.values[4]).toBe(5.25);
  });
});

describe("tables that are refused", () => {
  test.each([
    ["a row with too few cells", `${HEADER}\n1,2,3`, ", line 2", "3 cells", "10, one for each column"],
    [
      "a row with too many cells",
      `${HEADER}\n${row(1)},7`,
      ", line 2",
      "11 cells",
      "10, one for each column",
    ],
    ["a row without a time", `${HEADER}\n${row("")}`, ", line 2, column 1 (t)", '""', "as the row's time"],
    [
      "time that runs backwards",
      `${HEADER}\n${row(2)}\n${row(1)}`,
      ", line 3, column 1 (t)",
      '"1"',
      "line 2",
    ],
    [
      "time that stands still",
      `${HEADER}\n${row(2)}\n${row(2)}`,
      ", line 3, column 1 (t)",
      '"2"',
      "time.rateHz",
    ],
    ["a header alone", HEADER, ".csv", "no rows", "at least one row"],
    ["an empty file", "", ".csv", "no rows", "at least one row"],
    ["a missing column", `${HEADER.replace("gy", "wy")}\n${row(1)}`, ", gyro of S1", "wy", '"gy"'],
  ])("%s", async (_, text, where, found, expected) => {
    await expect(read([text])).rejects.toMatchObject({
      code: "TABLE_INVALID",
      details: [
        {
          where: expect.stringContaining(where),
          found: expect.stringContaining(found),
          expected: expect.stringContaining(expected),
        },
      ],
    });
  });

  test("an ISO time column says what it wants", async () => {
    const iso = { time: { column: "t", unit: "iso" } };
    await expect(read([HEADER, row("12:00")], iso)).rejects.toThrow(/expected an ISO 8601 date and time/);
  });
});

test("a six-axis table has no field to lose", async () => {
  const lines = ["t,gx,gy,gz,ax,ay,az", "1,1,2,3,4,5,6"];
  const { rows } = await read(lines, { sensors: [SIX_AXIS] }, "six-axis-2000");
  expect(presentOf(rows)).toEqual([HAS_INERTIAL]);
});
