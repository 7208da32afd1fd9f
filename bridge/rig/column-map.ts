/**
 * The column map: how somebody's table of sensor readings is laid out, so that it can be imported as a trial. One JSON
 * file in config/columns (or anywhere). It says which column holds what, in which unit; nothing is guessed.
 */
import { z } from "zod";
import { UNITS } from "./packet-layout.ts";

/** What one of a unit is in the unit used inside: the units of packet layouts, and what else is found in tables. */
export const COLUMN_UNITS = {
  gyro: UNITS.gyro,
  accel: UNITS.accel,
  mag: { ...UNITS.mag, mT: 1000 },
  time: UNITS.tick,
} as const;

type UnitOf<K extends keyof typeof COLUMN_UNITS> = keyof (typeof COLUMN_UNITS)[K];
const unitsOf = <K extends keyof typeof COLUMN_UNITS>(what: K) =>
  Object.keys(COLUMN_UNITS[what]) as UnitOf<K>[];

const columnSchema = z.union([z.string().min(1), z.number().int().min(1)], {
  error: "a header name, or a column number counting from 1",
});
const axisColumns = z
  .tuple([columnSchema, columnSchema, columnSchema])
  .describe(
    "The columns of the sensor's own x, y and z axis, each by header name or by number counting from 1. In a name, {number} stands for the sensor's place in the rig counting from 1 and {name} for its name.",
  );
const sign = z.union([z.literal(1), z.literal(-1)], { error: "1 or -1" });
const axisSigns = z
  .tuple([sign, sign, sign])
  .default([1, 1, 1])
  .describe("1 or -1 for each axis, for tables whose axis points the other way.");
const scale = z
  .number()
  .default(1)
  .describe("Multiplies each cell before the unit is applied, e.g. the size of one count.");

const gyroSchema = z
  .strictObject({
    columns: axisColumns,
    unit: z.enum(unitsOf("gyro")).describe("Unit of the cells."),
    signs: axisSigns,
    scale,
  })
  .describe("Angular rate.");

const accelSchema = z
  .strictObject({
    columns: axisColumns,
    unit: z.enum(unitsOf("accel")).describe("Unit of the cells; g is 9.80665 m/s²."),
    signs: axisSigns,
    scale,
  })
  .describe(
    "Specific force: at rest the axis that looks up reads about +9.81 m/s². Set signs if yours does not.",
  );

const magSchema = z
  .strictObject({
    columns: axisColumns,
    unit: z
      .enum([...unitsOf("mag"), "normalised"])
      .describe("Unit of the cells; normalised: 1 is the field of fieldUT."),
    fieldUT: z.number().positive().optional().describe("What a normalised field of 1 stands for."),
    signs: axisSigns,
    scale,
  })
  .refine((mag) => (mag.unit === "normalised") === (mag.fieldUT !== undefined), {
    path: ["fieldUT"],
    message: 'a field in µT with the unit "normalised", and no such key with any other unit',
  })
  .describe("Magnetic field; left out for six-axis sensors.");

const formatSchema = z
  .strictObject({
    separator: z
      .enum([",", ";", "tab", "spaces"])
      .default(",")
      .describe("Between cells; spaces: any run of spaces or tabs."),
    decimalMark: z.enum([".", ","]).default(".").describe("Decimal point or decimal comma."),
    preambleLines: z.number().int().min(0).max(1000).default(0).describe("Lines before the header, skipped."),
    headerRows: z
      .number()
      .int()
      .min(0)
      .max(9)
      .default(1)
      .describe(
        "Rows of column names. With several, a column's name is its cells joined by a space; an empty cell above the last row takes the text to its left.",
      ),
    commentPrefix: z.string().min(1).max(8).optional().describe("Lines that start with this are skipped."),
    missing: z
      .array(z.string().min(1))
      .default([])
      .describe("Cells that stand for a missing reading, besides the empty cell and NaN."),
    encoding: z
      .enum(["utf-8", "utf-16le", "latin1"])
      .default("utf-8")
      .describe("Encoding of the text; a byte order mark in the file overrides it."),
  })
  .refine((f) => f.separator !== "," || f.decimalMark !== ",", {
    path: ["decimalMark"],
    message: 'a point where the separator is ","',
  });

const timeSchema = z
  .strictObject({
    column: columnSchema.optional().describe("The time column, by header name or by number counting from 1."),
    unit: z
      .enum([...unitsOf("time"), "iso"])
      .default("s")
      .describe("Unit of the time column; iso: ISO 8601 date and time, UTC where no offset is given."),
    rateHz: z
      .number()
      .positive()
      .optional()
      .describe("Constant rate of the rows, for tables without a time column."),
  })
  .refine((time) => (time.column === undefined) !== (time.rateHz === undefined), {
    message: "either column or rateHz",
  });

const sensorColumnsSchema = z.strictObject({
  gyro: gyroSchema,
  accel: accelSchema,
  mag: magSchema.optional(),
});

export const columnMapSchema = z.strictObject({
  name: z.string().min(1).max(60).describe("What these tables are."),
  notes: z.string().max(2000).default("").describe("Free text."),
  arrangement: z
    .enum(["wide", "file-per-sensor"])
    .describe(
      "wide: one file, all sensors side by side. file-per-sensor: one file each, joined by their times.",
    ),
  format: formatSchema.prefault({}).describe("How the text is written."),
  time: timeSchema.describe("When each row was taken."),
  sensors: z
    .array(sensorColumnsSchema)
    .min(1)
    .max(64)
    .describe("One entry that fits every sensor of the rig, or one for each in the rig's order."),
  repeated: z
    .enum(["new", "held"])
    .default("new")
    .describe(
      "held: a row in which all of a sensor's values equal those of the row before is no new reading of that sensor. new: every row is.",
    ),
  mergeToleranceMs: z
    .number()
    .min(0)
    .optional()
    .describe(
      "Rows of different files at most this far apart are one sweep. Default: a third of the interval between rows.",
    ),
  ignored: z
    .array(columnSchema)
    .default([])
    .describe("Columns that are known and left aside, e.g. a reference orientation."),
});

export type ColumnMap = z.infer<typeof columnMapSchema>;
export type ColumnReference = z.infer<typeof columnSchema>;
export type SensorColumnMap = ColumnMap["sensors"][number];
