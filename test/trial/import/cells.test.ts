import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { numberReader, timeReader } from "../../../bridge/trial/import/cells.ts";

describe("numbers", () => {
  const point = numberReader(".");
  const comma = numberReader(",");

  test.each([
    ["1.2e-005", 1.2e-5],
    ["-0.00024414", -0.00024414],
    ["+3", 3],
    ["7.", 7],
    [".5", 0.5],
    ["1E+2", 100],
  ])("reads %s with a decimal point", (cell, value) => {
    expect(point(cell)).toBe(value);
  });

  test.each([
    ["1,2E-5", 1.2e-5],
    ["-0,5", -0.5],
    ["12", 12],
    [",25", 0.25],
  ])("reads %s with a decimal comma", (cell, value) => {
    expect(comma(cell)).toBe(value);
  });

  test.each(["", "1,5", "0x10", "Infinity", "1e999", "1 2", "--1", "1e", "12 m/s", "1.2.3"])(
    "takes %j for no number with a decimal point",
    (cell) => {
      expect(point(cell)).toBeNaN();
    },
  );

  test("does not take a decimal point where a comma is declared", () => {
    expect(comma("1.5")).toBeNaN();
  });

  test("reads back every number as JavaScript writes it, exactly", () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        expect(point(String(value))).toBe(value === 0 ? 0 : value);
        expect(comma(String(value).replace(".", ","))).toBe(value === 0 ? 0 : value);
      }),
    );
  });
});

describe("times", () => {
  test("come out in whole µs from every unit", () => {
    expect(timeReader("s", ".")("0.0035")).toBe(3500);
    expect(timeReader("ms", ",")("3,5")).toBe(3500);
    expect(timeReader("µs", ".")("3500")).toBe(3500);
    expect(timeReader("us", ".")("3500.4")).toBe(3500);
  });

  test("are rounded to the nearest µs", () => {
    expect(timeReader("s", ".")("1.0000006")).toBe(1_000_001);
  });

  test("read ISO dates with offset and fraction, and as UTC without an offset", () => {
    const iso = timeReader("iso", ".");
    // 2024-03-01T12:00:00Z is 1709294400 s after 1970-01-01 (19783 days and 12 hours).
    expect(iso("2024-03-01T12:00:00Z")).toBe(1_709_294_400_000_000);
    expect(iso("2024-03-01T14:00:00+02:00")).toBe(1_709_294_400_000_000);
    expect(iso("2024-03-01 12:00:00.0035")).toBe(1_709_294_400_003_500);
    expect(iso("2024-03-01T12:00:00,123456")).toBe(1_709_294_400_123_456);
  });

  test.each(["", "12:00:00", "2024-13-01T00:00:00Z", "yesterday", "12.5"])(
    "take %j for no ISO time",
    (cell) => {
      expect(timeReader("iso", ".")(cell)).toBeNaN();
    },
  );
});
