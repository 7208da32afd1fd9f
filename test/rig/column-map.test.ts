import { describe, expect, test } from "vitest";
import type { BendwatchError } from "../../bridge/errors.ts";
import { columnMapSchema } from "../../bridge/rig/column-map.ts";
import { checkConfig } from "../../bridge/rig/load.ts";

const gyro = { columns: ["gx", "gy", "gz"], unit: "rad/s" };
const accel = { columns: ["ax", "ay", "az"], unit: "m/s²" };
const good = { name: "Table", arrangement: "wide", time: { column: "t" }, sensors: [{ gyro, accel }] };

function faults(map: unknown) {
  try {
    checkConfig("map.json", map, columnMapSchema);
  } catch (error) {
    return (error as BendwatchError).details.map(({ where, found, expected }) => [where, found, expected]);
  }
  return [];
}

test("a short map is completed by its defaults", () => {
  expect(checkConfig("map.json", good, columnMapSchema)).toEqual({
    name: "Table",
    notes: "",
    arrangement: "wide",
    format: {
      separator: ",",
      decimalMark: ".",
      preambleLines: 0,
      headerRows: 1,
      missing: [],
      encoding: "utf-8",
    },
    time: { column: "t", unit: "s" },
    sensors: [
      { gyro: { ...gyro, signs: [1, 1, 1], scale: 1 }, accel: { ...accel, signs: [1, 1, 1], scale: 1 } },
    ],
    repeated: "new",
    ignored: [],
  });
});

describe("what is wrong in a map is named:", () => {
  test("an unknown unit, with those that are known", () => {
    expect(faults({ ...good, sensors: [{ gyro: { ...gyro, unit: "rpm" }, accel }] })).toEqual([
      ["map.json, sensors[0].gyro.unit", '"rpm"', 'one of "rad/s"|"deg/s"'],
    ]);
  });

  test("a column that is neither a name nor a number from 1 on", () => {
    const wrong = { ...gyro, columns: ["gx", 0, 1.5] };
    const found = faults({ ...good, sensors: [{ gyro: wrong, accel }] });
    expect(found.map(([where]) => where)).toEqual([
      "map.json, sensors[0].gyro.columns[1]",
      "map.json, sensors[0].gyro.columns[2]",
    ]);
    expect(faults({ ...good, time: { column: null } })).toEqual([
      ["map.json, time.column", "null", "a header name, or a column number counting from 1"],
    ]);
  });

  test.each([
    ["neither a time column nor a rate", {}],
    ["both a time column and a rate", { column: "t", rateHz: 100 }],
  ])("%s", (_, time) => {
    expect(faults({ ...good, time }).map(([where, , expected]) => [where, expected])).toEqual([
      ["map.json, time", "either column or rateHz"],
    ]);
  });

  test.each([
    ["a normalised field without its size", { unit: "normalised" }],
    ["a size beside a field in units", { unit: "µT", fieldUT: 50 }],
  ])("%s", (_, unit) => {
    const mag = { columns: [8, 9, 10], ...unit };
    const found = faults({ ...good, sensors: [{ gyro, accel, mag }] });
    expect(found.map(([where]) => where)).toEqual(["map.json, sensors[0].mag.fieldUT"]);
  });

  test("a decimal comma between cells separated by commas", () => {
    const found = faults({ ...good, format: { decimalMark: "," } });
    expect(found.map(([where, , expected]) => [where, expected])).toEqual([
      ["map.json, format.decimalMark", 'a point where the separator is ","'],
    ]);
  });

  test("several faults at once, unknown keys among them", () => {
    const wrong = {
      ...good,
      arrangement: "tall",
      colour: 1,
      sensors: [{ gyro: { ...gyro, signs: [1, 0, 1] } }],
    };
    expect(faults(wrong).map(([where]) => where)).toEqual([
      "map.json, arrangement",
      "map.json, sensors[0].gyro.signs[1]",
      "map.json, sensors[0].accel",
      "map.json, colour",
    ]);
  });
});
