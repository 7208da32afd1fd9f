import { describe, expect, test } from "vitest";
import type { BendwatchError } from "../../../bridge/errors.ts";
import { findColumns, headerNames } from "../../../bridge/trial/import/columns.ts";
import { mapOf, NINE_AXIS, rigOf, SIX_AXIS } from "./fixtures.ts";

const names = "t gx gy gz ax ay az mx my mz".split(" ");

describe("header names", () => {
  test("one row is taken as it is, without empty columns at the end", () => {
    expect(headerNames([["t", "", "gx", "", ""]])).toEqual(["t", "", "gx"]);
  });

  test("two rows are joined, a heading spreading over the empty cells right of it", () => {
    const upper = ["Time (s)", "Gyro", "", "", "Field", "", "", ""];
    const lower = ["", "X", "Y", "Z", "X", "Y", "Z", ""];
    expect(headerNames([upper, lower])).toEqual([
      "Time (s)",
      "Gyro X",
      "Gyro Y",
      "Gyro Z",
      "Field X",
      "Field Y",
      "Field Z",
    ]);
  });
});

describe("finding columns", () => {
  test("names and numbers counting from 1 find the same columns", () => {
    const byNumber = mapOf({
      time: { column: 1 },
      sensors: [
        {
          gyro: { columns: [2, 3, 4], unit: "rad/s" },
          accel: { columns: [5, 6, 7], unit: "m/s²" },
          mag: { columns: [8, 9, 10], unit: "µT" },
        },
      ],
    });
    const rig = rigOf(1);
    expect(findColumns("f", names, byNumber, rig, [0])).toEqual(findColumns("f", names, mapOf(), rig, [0]));
  });

  test("{number} and {name} let one entry fit every sensor", () => {
    const wide = ["t", "g1x", "g1y", "g1z", "S1x", "S1y", "S1z", "g2x", "g2y", "g2z", "S2x", "S2y", "S2z"];
    const entry = {
      gyro: { columns: ["g{number}x", "g{number}y", "g{number}z"], unit: "rad/s" },
      accel: { columns: ["{name}x", "{name}y", "{name}z"], unit: "g" },
    };
    const found = findColumns("f", wide, mapOf({ sensors: [entry] }), rigOf(2, "six-axis-2000"), [0, 1]);
    expect(found.sensors.map((parts) => parts.map(({ columns }) => columns))).toEqual([
      [
        [1, 2, 3],
        [4, 5, 6],
      ],
      [
        [7, 8, 9],
        [10, 11, 12],
      ],
    ]);
  });

  test("units, signs and scale become one factor an axis", () => {
    const entry = {
      gyro: { ...NINE_AXIS.gyro, unit: "deg/s", signs: [1, -1, 1] },
      accel: { ...NINE_AXIS.accel, unit: "g", scale: 0.001 },
      mag: { ...NINE_AXIS.mag, unit: "normalised", fieldUT: 49 },
    };
    const [gyro, accel, mag] = findColumns("f", names, mapOf({ sensors: [entry] }), rigOf(1), [0])
      .sensors[0]!;
    expect(gyro!.factors).toEqual([Math.PI / 180, -Math.PI / 180, Math.PI / 180]);
    expect(accel!.factors).toEqual([0.00980665, 0.00980665, 0.00980665]);
    expect(mag!.factors).toEqual([49, 49, 49]);
  });

  test.each([
    ["µT", 1],
    ["uT", 1],
    ["mT", 1000],
    ["gauss", 100],
  ])("a field in %s is brought to µT by %d", (unit, factor) => {
    const map = mapOf({ sensors: [{ ...NINE_AXIS, mag: { ...NINE_AXIS.mag, unit } }] });
    expect(findColumns("f", names, map, rigOf(1), [0]).sensors[0]![2]!.factors).toEqual([
      factor,
      factor,
      factor,
    ]);
  });

  test("what is left aside is told apart: ignored by the map, or not mentioned", () => {
    const found = findColumns("f", [...names, "q", "note"], mapOf({ ignored: ["q"] }), rigOf(1), [0]);
    expect(found.ignored).toEqual(["q"]);
    expect(found.unmentioned).toEqual(["note"]);
  });

  test("missing, ambiguous and doubly used columns are all named at once", () => {
    const entry = {
      gyro: { columns: ["gx", "rate y", "gz"], unit: "rad/s" },
      accel: { columns: ["gx", 5, 99], unit: "m/s²" },
    };
    const doubled = ["t", "gx", "gz", "ax", "ay", "gz"];
    let error: BendwatchError | null = null;
    try {
      findColumns("run.csv", doubled, mapOf({ sensors: [entry] }), rigOf(1, "six-axis-2000"), [0]);
    } catch (thrown) {
      error = thrown as BendwatchError;
    }
    expect(error?.code).toBe("TABLE_INVALID");
    expect(error?.details).toEqual([
      {
        where: "run.csv, gyro of S1",
        found: "the columns t, gx, gz, ax, ay, gz",
        expected: 'a column named "rate y"',
      },
      {
        where: "run.csv, gyro of S1",
        found: 'columns 3 and 6 named "gz"',
        expected: "a name that occurs once, or a column number",
      },
      {
        where: "run.csv, accel of S1",
        found: "column 2 (gx), which is already the gyro of S1",
        expected: "a column of its own",
      },
      { where: "run.csv, accel of S1", found: "the columns t, gx, gz, ax, ay, gz", expected: "a column 99" },
    ]);
  });

  test("a table without a time column has none to find", () => {
    const map = mapOf({ time: { rateHz: 50 }, sensors: [SIX_AXIS] });
    expect(findColumns("f", names.slice(1), map, rigOf(1, "six-axis-2000"), [0]).time).toBe(-1);
  });
});
