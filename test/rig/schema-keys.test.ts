import { describe, expect, test } from "vitest";
import { z } from "zod";
import { keyRows, unitOf } from "../../bridge/rig/schema-keys.ts";

const rowsOf = (shape: z.ZodRawShape) => keyRows(z.strictObject(shape));

describe("rows of a schema", () => {
  test("say unit, default, range and meaning of a key", () => {
    const rows = rowsOf({
      lengthMm: z.number().positive().max(100).describe("How long."),
      count: z.number().int().min(2).default(3),
      name: z.string().min(1).max(9).optional(),
    });
    expect(rows).toEqual([
      {
        key: "lengthMm",
        unit: "mm",
        default: "required",
        range: "number above 0 up to 100",
        meaning: "How long.",
      },
      { key: "count", unit: "", default: "3", range: "whole number, at least 2", meaning: "" },
      { key: "name", unit: "", default: "left out", range: "text, 1 to 9 characters", meaning: "" },
    ]);
  });

  test("go into groups and lists, each parent before its keys", () => {
    const inner = z.strictObject({ yawDeg: z.number().default(0) });
    const rows = rowsOf({ mounting: inner.prefault({}), sensors: z.array(inner).max(4) });
    expect(rows.map(({ key, default: value, range }) => [key, value, range])).toEqual([
      ["mounting", "", "group"],
      ["mounting.yawDeg", "0", "number"],
      ["sensors", "required", "list of at most 4"],
      ["sensors[].yawDeg", "0", "number"],
    ]);
  });

  test("of a choice name the kinds a key belongs to, and once where all have it", () => {
    const rows = rowsOf({
      framing: z.discriminatedUnion("kind", [
        z.strictObject({ kind: z.literal("a"), size: z.number() }).describe("One."),
        z.strictObject({ kind: z.literal("b"), size: z.number(), mark: z.string() }),
      ]),
    });
    expect(rows.map(({ key, range, meaning }) => [key, range, meaning])).toEqual([
      ["framing", "group", ""],
      ["framing.kind", '"a", "b"', "a: One."],
      ["framing.size", "number", ""],
      ["framing.mark", "text", "(kind: b)"],
    ]);
  });

  test.each([
    [z.enum(["x", "y"]), '"x", "y"'],
    [z.union([z.literal(1), z.literal(-1)]), "1 or -1"],
    [z.union([z.string().min(1), z.number().int().min(1)]), "text, not empty or whole number, at least 1"],
    [z.tuple([z.number(), z.number(), z.number()]), "3 of: number"],
    [
      z
        .array(z.enum(["x"]))
        .min(1)
        .max(3),
      'list of 1 to 3 of: "x"',
    ],
    [z.boolean(), "boolean"],
    [z.iso.date(), "date"],
  ])("give the range of %#", (schema, range) => {
    expect(rowsOf({ key: schema })[0]!.range).toBe(range);
  });
});

test.each([
  ["sensors[].calibration.gyroBiasDegPerS", "°/s"],
  ["gyro.noiseDegPerSPerSqrtHz", "°/s/√Hz"],
  ["mag.rangeUT", "µT"],
  ["accel.biasMilliG", "mg"],
  ["site.heightM", "m"],
  ["stuckAxisS", "s"],
  ["name", ""],
])("the unit of %s is read from its ending: %j", (key, unit) => {
  expect(unitOf(key)).toBe(unit);
});
