/**
 * An export against the Frictionless specifications v1 (specs.frictionlessdata.io: Data Package, Data Resource, Tabular
 * Data Resource, Table Schema) and RFC 4180: each rule here is a MUST or SHOULD of those texts.
 */
import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { describe, expect, test } from "vitest";
import { exported } from "../trial/export/sample-export.ts";

interface Field {
  readonly name: string;
  readonly type: string;
  readonly format: string;
  readonly trueValues?: readonly string[];
  readonly falseValues?: readonly string[];
}

interface Resource {
  readonly name: string;
  readonly path: string;
  readonly profile: string;
  readonly encoding: string;
  readonly bytes?: number;
  readonly hash?: string;
  readonly schema?: { readonly fields: readonly Field[]; readonly missingValues: readonly string[] };
}

interface Package {
  readonly name: string;
  readonly profile: string;
  readonly resources: readonly Resource[];
}

/** The types Table Schema names. */
const FIELD_TYPES =
  "string number integer boolean object array date time datetime year yearmonth duration geopoint geojson any".split(
    " ",
  );

function readPackage(): { folder: string; descriptor: Package; tables: readonly Resource[] } {
  const folder = exported();
  const descriptor = JSON.parse(readFileSync(join(folder, "datapackage.json"), "utf8")) as Package;
  const tables = descriptor.resources.filter(({ profile }) => profile === "tabular-data-resource");
  return { folder, descriptor, tables };
}

test("Data Package: resources are required and not empty; the name is of lower-case letters, digits, . _ -", () => {
  const { descriptor } = readPackage();
  expect(descriptor.profile).toBe("data-package");
  expect(descriptor.resources.length).toBeGreaterThan(0);
  expect(descriptor.name).toMatch(/^[a-z0-9._-]+$/);
});

test("Data Resource: a unique name, exactly one location, a path below the descriptor; hash with its algorithm", () => {
  const { folder, descriptor } = readPackage();
  const names = descriptor.resources.map(({ name }) => name);
  expect(new Set(names).size).toBe(names.length);
  for (const resource of descriptor.resources) {
    expect(resource.name).toMatch(/^[a-z0-9._-]+$/);
    expect(resource).not.toHaveProperty("data");
    expect(resource.path).not.toMatch(/^\/|\.\./);
    expect(existsSync(join(folder, resource.path))).toBe(true);
    expect(resource.encoding).toBe("utf-8");
    if (resource.hash !== undefined) expect(resource.hash).toMatch(/^sha256:[0-9a-f]{64}$/);
  }
});

describe("Tabular Data Resource", () => {
  test("has the profile and a schema; all tables are there", () => {
    const { tables } = readPackage();
    expect(tables.map(({ name }) => name)).toEqual([
      "midline",
      "sensors",
      "flags",
      "gait",
      "envelope",
      "bouts",
      "marks",
      "sync",
      "frames",
      "reference",
      "drive",
    ]);
    for (const { schema } of tables) expect(schema!.fields.length).toBeGreaterThan(0);
  });

  test("is UTF-8 CSV of RFC 4180 without a dialect: lines end in CRLF, every row has a cell for each field", () => {
    const { folder, tables } = readPackage();
    for (const { path, schema } of tables) {
      const text = new TextDecoder("utf-8", { fatal: true }).decode(readFileSync(join(folder, path)));
      expect(text.endsWith("\r\n")).toBe(true);
      expect(text.replaceAll("\r\n", "")).not.toMatch(/[\r\n]/);
      const rows: string[][] = parse(text, { record_delimiter: "\r\n" });
      expect(rows[0]).toEqual(schema!.fields.map(({ name }) => name));
    }
  });
});

describe("Table Schema", () => {
  test("fields have unique names, a type it knows, and the default format", () => {
    for (const { schema } of readPackage().tables) {
      const names = schema!.fields.map(({ name }) => name);
      expect(new Set(names).size).toBe(names.length);
      for (const { type, format } of schema!.fields) {
        expect(FIELD_TYPES).toContain(type);
        expect(format).toBe("default");
      }
    }
  });

  test("every cell is of its field's type or a missing value", () => {
    const { folder, tables } = readPackage();
    let cells = 0;
    for (const { path, schema } of tables) {
      const rows: string[][] = parse(readFileSync(join(folder, path)), { from: 2 });
      for (const row of rows) {
        row.forEach((cell, i) => {
          cells++;
          if (!schema!.missingValues.includes(cell)) expect(isOfType(cell, schema!.fields[i]!)).toBe(true);
        });
      }
    }
    expect(cells).toBeGreaterThan(20 * 124);
  });
});

/** Lexical forms of Table Schema: number as in XML Schema's decimal, integer, boolean by its listed values. */
function isOfType(cell: string, field: Field): boolean {
  switch (field.type) {
    case "number":
      return /^[+-]?\d+(\.\d+)?$/.test(cell);
    case "integer":
      return /^[+-]?\d+$/.test(cell);
    case "boolean":
      return [...field.trueValues!, ...field.falseValues!].includes(cell);
    default:
      return field.type === "string";
  }
}
