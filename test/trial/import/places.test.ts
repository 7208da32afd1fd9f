import { describe, expect, test } from "vitest";
import { checkMapFitsRig, placeFiles, tableFile } from "../../../bridge/trial/import/places.ts";
import { mapOf, NINE_AXIS, rigOf, SIX_AXIS } from "./fixtures.ts";

const perSensor = mapOf({ arrangement: "file-per-sensor" });
const rig = rigOf(3);

describe("which file holds which sensors", () => {
  test("a wide table holds them all", () => {
    expect(placeFiles([{ path: "a" }], mapOf(), rig)).toEqual([[0, 1, 2]]);
  });

  test("one file a sensor goes by the rig's order, those that name their sensor first", () => {
    expect(placeFiles([{ path: "a" }, { path: "b" }, { path: "c" }], perSensor, rig)).toEqual([
      [0],
      [1],
      [2],
    ]);
    const named = [{ path: "a", sensor: "S3" }, { path: "b" }, { path: "c", sensor: "S1" }];
    expect(placeFiles(named, perSensor, rig)).toEqual([[2], [1], [0]]);
  });

  test("an argument may name its sensor; other paths with an equals sign are just paths", () => {
    expect(tableFile("S2=data/b.csv", rig)).toEqual({ path: "data/b.csv", sensor: "S2" });
    expect(tableFile("run=2/b.csv", rig)).toEqual({ path: "run=2/b.csv" });
    expect(tableFile("b.csv", rig)).toEqual({ path: "b.csv" });
  });

  test.each([
    ["too few files", [{ path: "a" }], "1 (a)", '3, one for each sensor of "Test rig"'],
    [
      "two files for one sensor",
      [{ path: "a", sensor: "S2" }, { path: "b", sensor: "S2" }, { path: "c" }],
      "a second table of sensor S2",
      "one for each sensor",
    ],
    [
      "an unknown sensor",
      [{ path: "a", sensor: "S9" }, { path: "b" }, { path: "c" }],
      'sensor "S9"',
      "one of the rig's: S1, S2, S3",
    ],
  ])("%s: refused", (_, files, found, expected) => {
    expect(() => placeFiles(files, perSensor, rig)).toThrow(`found ${found}; expected ${expected}`);
  });

  test("two wide tables: refused", () => {
    expect(() => placeFiles([{ path: "a" }, { path: "b" }], mapOf(), rig)).toThrow("expected one wide table");
  });
});

describe("whether the map fits the rig", () => {
  test("one entry fits all, or there is one for each sensor", () => {
    checkMapFitsRig(mapOf(), rig);
    checkMapFitsRig(mapOf({ sensors: [NINE_AXIS, NINE_AXIS, NINE_AXIS] }), rig);
    expect(() => checkMapFitsRig(mapOf({ sensors: [NINE_AXIS, NINE_AXIS] }), rig)).toThrow(
      'column map "test map", sensors: found 2 entries; expected one that fits every sensor, or one for each of the 3',
    );
  });

  test("a magnetometer must be in both or in neither", () => {
    expect(() => checkMapFitsRig(mapOf({ sensors: [SIX_AXIS] }), rig)).toThrow(
      "sensors[0].mag: found no columns; expected three: its model nine-axis-1000 (S1) has a magnetometer",
    );
    expect(() => checkMapFitsRig(mapOf(), rigOf(1, "six-axis-2000"))).toThrow(
      "sensors[0].mag: found columns; expected none: its model six-axis-2000 (S1) has no magnetometer",
    );
  });
});
