import { expect, test } from "vitest";
import { formatImportSummary } from "../../../bridge/trial/import/summary.ts";
import { HEADER, imported, mapOf, rigOf, row, tableOf } from "./fixtures.ts";

test("the summary says what was read, what was left out and what each sensor got", async () => {
  const lines = [
    `${HEADER},q,note`,
    "# a remark",
    `${row(0)},1,a`,
    `${row(0.01)},1,b`,
    "0.02,1,2,3,4,5,6,?,8,9,1,c",
    `${row(0.05, 2)},1,d`,
  ];
  const map = mapOf({ format: { commentPrefix: "#" }, ignored: ["q"], repeated: "held" });
  const path = tableOf(lines.join("\n"), "summary.csv");
  const { summary } = await imported([path], map, rigOf(1));
  expect(formatImportSummary(summary)).toBe(
    [
      `${path}: 4 rows; cells that are no numbers, taken as lost: 1`,
      "  left out: comment lines: 1",
      "  left out: columns ignored by the map: q",
      "  left out: columns the map does not mention: note",
      "4 sweeps over 0.050 s from 0.000 s, 100.00 Hz; 2 lost by gaps in time",
      "S1: 3 readings, 1 without mag; 1 held, 0 lost, 0 without a row",
    ].join("\n"),
  );
});

test("a rate that is not the rig's is pointed out", async () => {
  const path = tableOf([HEADER, row(0), row(0.02), row(0.04)].join("\n"));
  const { summary } = await imported([path], mapOf(), rigOf(1));
  expect(formatImportSummary(summary)).toContain("The rig says 100 Hz: set hub.rateHz to what the table has");
});
