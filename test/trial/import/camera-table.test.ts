import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import type { BendwatchError } from "../../../bridge/errors.ts";
import { readCameraTable } from "../../../bridge/trial/import/camera-table.ts";
import { temporaryFolder } from "../fixtures.ts";

const EVEN = "x_mm_000,y_mm_000,x_mm_001,y_mm_001,x_mm_002,y_mm_002,x_mm_003,y_mm_003";
const row = (when: number | string, shift = 0) =>
  `${when},0,${shift},-100,${shift},-200,${shift},-300,${shift}`;

function fileOf(...lines: readonly string[]): string {
  const file = join(temporaryFolder(), "camera.csv");
  writeFileSync(file, `${lines.join("\n")}\n`);
  return file;
}

test("evenly spaced points by hub time", async () => {
  const file = fileOf(`time_s,${EVEN}`, row(0.5, 1), row("0.51", 2), row(0.52, 3), row(0.53, 4));
  const table = await readCameraTable(file);
  expect(table.clock).toBe("time_s");
  expect([...table.when]).toEqual([0.5, 0.51, 0.52, 0.53]);
  expect(table.stations).toEqual([0, 1 / 3, 2 / 3, 1]);
  expect([...table.points.subarray(8, 12)]).toEqual([0, 2, -100, 2]);
});

test("points at stations by frame, some frames not seen", async () => {
  const at = [5, 30, 62.5, 100].map((percent) => `x_mm_at_${percent},y_mm_at_${percent}`).join(",");
  const missing = "8,0,1,,,-200,1,-300,1";
  const table = await readCameraTable(
    fileOf(`frame,${at}`, ...[6, 7, 9, 10].map((n) => row(n)), missing.replace("8", "11")),
  );
  expect(table.clock).toBe("frame");
  expect([...table.when]).toEqual([6, 7, 9, 10]);
  expect(table.stations).toEqual([0.05, 0.3, 0.625, 1]);
  expect(table.leftOut).toBe(1);
});

describe("what is wrong is named by file, row and column, found and expected:", () => {
  const good = [row(0), row(1), row(2), row(3)];
  const header = `frame,${EVEN}`;
  test.each([
    ["an unknown clock", [`seconds,${EVEN}`, ...good], "header, column 1", '"seconds"'],
    [
      "a column out of turn",
      [header.replace("y_mm_001", "z_mm_001"), ...good],
      "header, column 5",
      '"z_mm_001"',
    ],
    ["a point left out", [header.replaceAll("_002", "_004"), ...good], "header, column 6", '"x_mm_004"'],
    [
      "a y of another point",
      [header.replace("y_mm_002", "y_mm_003"), ...good],
      "header, column 7",
      '"y_mm_003"',
    ],
    ["an x without y", [header.replace(",y_mm_003", ""), ...good], "header, column 9", '""'],
    ["too few points", ["frame,x_mm_000,y_mm_000", "0,0,0"], "header", "1 points"],
    [
      "stations that do not increase",
      ["frame,x_mm_at_0,y_mm_at_0,x_mm_at_50,y_mm_at_50,x_mm_at_40,y_mm_at_40", ...good],
      "header, column 6",
      '"x_mm_at_40"',
    ],
    ["a cell too many", [header, ...good, `${row(4)},7`], "line 6", "10 cells"],
    [
      "a word among numbers",
      [header, ...good, row(4).replace("-200", "left")],
      "line 6, column x_mm_002",
      '"left"',
    ],
    ["frames out of order", [header, ...good, row(3)], "line 6, column frame", "3"],
    ["half a frame", [header, ...good, row(3.5)], "line 6, column frame", "3.5"],
    ["a row without time", [header, ...good, row("")], "line 6, column frame", "nothing"],
    ["too few frames", [header, row(0)], "", "1 frames with a whole midline, 0 without"],
    ["nothing at all", [], "", "an empty file"],
  ])("%s", async (_, lines, where, found) => {
    const file = fileOf(...lines);
    const error = await readCameraTable(file).then(
      () => null,
      (thrown: BendwatchError) => thrown,
    );
    expect(error?.code).toBe("TABLE_INVALID");
    expect(error?.details[0]?.where).toBe(where === "" ? file : `${file}, ${where}`);
    expect(error?.details[0]?.found).toBe(found);
  });
});

test("a file that is not there", async () => {
  await expect(readCameraTable(join(temporaryFolder(), "none.csv"))).rejects.toMatchObject({
    code: "TABLE_INVALID",
  });
});
