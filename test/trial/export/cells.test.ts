import { parse } from "csv-parse/sync";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { CellWriter } from "../../../bridge/trial/export/cells.ts";

function written(write: (cells: CellWriter) => void): string {
  const cells = new CellWriter(4);
  write(cells);
  return Buffer.from(cells.take()).toString("utf8");
}

describe("numbers", () => {
  test.each([
    [0, 3, "0.000"],
    [-0, 3, "0.000"],
    [-0.0004, 3, "0.000"],
    [-0.0005, 3, "-0.001"],
    [0.5, 0, "1"],
    [1234.5678, 3, "1234.568"],
    [-12.3, 1, "-12.3"],
    [9.9996, 3, "10.000"],
    [600.000001, 6, "600.000001"],
    [42, 0, "42"],
    [1e15, 3, "1000000000000000.000"],
    [Number.NaN, 3, ""],
    [Number.POSITIVE_INFINITY, 3, ""],
  ])("%d with %d decimals is %j", (value, decimals, expected) => {
    expect(written((cells) => cells.number(value, decimals))).toBe(expected);
  });

  test("any number reads back to within half of the last place", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e6, max: 1e6, noNaN: true }),
        fc.integer({ min: 0, max: 7 }),
        (value, decimals) => {
          const cell = written((cells) => cells.number(value, decimals));
          expect(cell).toMatch(decimals === 0 ? /^-?\d+$/ : new RegExp(`^-?\\d+\\.\\d{${decimals}}$`));
          // Half a place, and the rounding of value * 10^decimals, at most 1e13: below 0.001 places.
          expect(Math.abs(Number(cell) - value)).toBeLessThanOrEqual(0.501 * 10 ** -decimals);
        },
      ),
      { seed: 4180 },
    );
  });
});

describe("texts", () => {
  test("of any kind read back from RFC 4180 rows; what looks like a formula has an apostrophe in front", () => {
    const formula = /^[=+\-@\t\r]/;
    fc.assert(
      fc.property(
        fc.array(fc.array(fc.string({ unit: "binary" }), { minLength: 2, maxLength: 2 }), { minLength: 1 }),
        (rows) => {
          const csv = written((cells) => {
            for (const row of rows) {
              for (const cell of row) cells.text(cell);
              cells.endRow();
            }
          });
          const read: string[][] = parse(csv, { record_delimiter: "\r\n", relax_column_count: true });
          expect(read).toEqual(
            rows.map((row) => row.map((cell) => (formula.test(cell) ? `'${cell}` : cell))),
          );
        },
      ),
      { seed: 4180 },
    );
  });

  test.each([
    ["plain", "plain"],
    ["a,b", '"a,b"'],
    ['say "go"', '"say ""go"""'],
    ["two\nlines", '"two\nlines"'],
    ["=1+1", "'=1+1"],
    ["@SUM(A1)", "'@SUM(A1)"],
    ["-3 dB", "'-3 dB"],
    ["\tx", "'\tx"],
    ["7 % left", "7 % left"],
  ])("%j is written %j", (value, expected) => {
    expect(written((cells) => cells.text(value))).toBe(expected);
  });
});
