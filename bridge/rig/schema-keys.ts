/** The keys of a configuration schema as rows of a table: unit, default, range and meaning, for config/README.md. */
import { z } from "zod";

/** A key of a configuration file. */
export interface KeyRow {
  /** With its parents: sensors[].mounting.yawDeg. */
  readonly key: string;
  readonly unit: string;
  readonly default: string;
  readonly range: string;
  readonly meaning: string;
}

type Json = z.core.JSONSchema.JSONSchema;

/** Units by the ending of a key, longest ending first. */
const UNIT_OF_ENDING: readonly (readonly [string, string])[] = [
  ["DegPerSPerSqrtHz", "°/s/√Hz"],
  ["MicroGPerSqrtHz", "µg/√Hz"],
  ["MPerS2", "m/s²"],
  ["DegPerS", "°/s"],
  ["MPerS", "m/s"],
  ["GPerKg", "g/kg"],
  ["MilliG", "mg"],
  ["Share", "share of 1"],
  ["Deg", "°"],
  ["Hz", "Hz"],
  ["Mm", "mm"],
  ["Ms", "ms"],
  ["Us", "µs"],
  ["UT", "µT"],
  ["G", "g"],
  ["C", "°C"],
  ["M", "m"],
  ["S", "s"],
  ["V", "V"],
  ["baudRate", "bit/s"],
];

/** The unit a key's name states; "" where it states none. */
export function unitOf(key: string): string {
  const name = key.slice(key.lastIndexOf(".") + 1);
  return UNIT_OF_ENDING.find(([ending]) => name.endsWith(ending))?.[1] ?? "";
}

/** All keys of a schema, parents before children, in the order of the schema. */
export function keyRows(schema: z.ZodType): KeyRow[] {
  return rowsOf(z.toJSONSchema(schema, { io: "input" }), "");
}

function rowsOf(schema: Json, parent: string): KeyRow[] {
  const required = new Set(schema.required ?? []);
  return Object.entries(schema.properties ?? {}).flatMap(([name, value]) => {
    const key = parent === "" ? name : `${parent}.${name}`;
    return rowsOfKey(value as Json, key, required.has(name));
  });
}

function rowsOfKey(schema: Json, key: string, isRequired: boolean): KeyRow[] {
  const item = schema.items as Json | undefined;
  const own: KeyRow = {
    key,
    unit: unitOf(key),
    default:
      schema.default === undefined ? (isRequired ? "required" : "left out") : defaultOf(schema.default),
    range: rangeOf(schema),
    meaning: schema.description ?? item?.description ?? "",
  };
  if (schema.properties !== undefined) return [own, ...rowsOf(schema, key)];
  if (schema.oneOf !== undefined) return [own, ...variantRows(schema.oneOf as Json[], key)];
  if (item?.properties !== undefined) return [own, ...rowsOf(item, `${key}[]`)];
  if (item?.oneOf !== undefined) return [own, ...variantRows(item.oneOf as Json[], `${key}[]`)];
  return [own];
}

/**
 * Keys of a choice between kinds of object: first the key that tells them apart, with each kind's meaning; then each
 * other key once for all the kinds that have it alike, those named.
 */
function variantRows(variants: readonly Json[], parent: string): KeyRow[] {
  const properties = variants.map((variant) => variant.properties as Record<string, Json>);
  const tag = Object.keys(properties[0]!).find((name) =>
    properties.every((p) => p[name]?.const !== undefined),
  )!;
  const kinds = properties.map((p) => String(p[tag]!.const));
  const meanings = variants.flatMap(({ description }, i) =>
    description ? [`${kinds[i]}: ${description}`] : [],
  );
  const choice: KeyRow = {
    key: `${parent}.${tag}`,
    unit: "",
    default: "required",
    range: kinds.map((kind) => JSON.stringify(kind)).join(", "),
    meaning: meanings.join(" "),
  };
  const rows = new Map<string, { row: KeyRow; kinds: string[] }>();
  variants.forEach((variant, i) => {
    for (const row of rowsOf(variant, parent)) {
      if (row.key === choice.key) continue;
      const id = JSON.stringify(row);
      const known = rows.get(id);
      if (known === undefined) rows.set(id, { row, kinds: [kinds[i]!] });
      else known.kinds.push(kinds[i]!);
    }
  });
  return [
    choice,
    ...[...rows.values()].map(({ row, kinds: having }) =>
      having.length === kinds.length
        ? row
        : { ...row, meaning: `${row.meaning} (${tag}: ${having.join(", ")})`.trim() },
    ),
  ];
}

/** Defaults of groups are those of their keys, which have rows of their own. */
function defaultOf(value: unknown): string {
  if (value === null || typeof value !== "object") return value === "" ? "empty" : JSON.stringify(value);
  if (Array.isArray(value)) return value.length === 0 ? "none" : JSON.stringify(value);
  return "";
}

function rangeOf(schema: Json): string {
  const choices = schema.enum ?? (schema.const === undefined ? undefined : [schema.const]);
  if (choices !== undefined) return choices.map((choice) => JSON.stringify(choice)).join(", ");
  if (schema.anyOf !== undefined) return [...new Set((schema.anyOf as Json[]).map(rangeOf))].join(" or ");
  if (schema.prefixItems !== undefined) {
    const items = (schema.prefixItems as Json[]).map(rangeOf);
    return `${items.length} of: ${items[0]}`;
  }
  if (schema.type === "array") {
    const count = bounds(schema.minItems, schema.maxItems);
    const item = schema.items as Json;
    const each = item.properties === undefined && item.oneOf === undefined ? ` of: ${rangeOf(item)}` : "";
    return `list${count && ` of ${count}`}${each}`;
  }
  if (schema.type === "string") return stringRange(schema);
  if (schema.type === "number" || schema.type === "integer") return numberRange(schema);
  return schema.type === "object" || schema.oneOf !== undefined ? "group" : String(schema.type);
}

function stringRange(schema: Json): string {
  if (schema.format !== undefined) return schema.format;
  if (schema.pattern !== undefined && schema.maxLength === undefined) return `text like ${schema.pattern}`;
  if (schema.minLength === 1 && schema.maxLength === undefined) return "text, not empty";
  const length = bounds(schema.minLength, schema.maxLength);
  return length === "" ? "text" : `text, ${length} ${length === "1" ? "character" : "characters"}`;
}

function numberRange(schema: Json): string {
  const whole = schema.type === "integer" ? "whole number" : "number";
  if (schema.exclusiveMinimum !== undefined) {
    const up = schema.maximum === undefined ? "" : ` up to ${schema.maximum}`;
    return `${whole} above ${schema.exclusiveMinimum}${up}`;
  }
  const range = bounds(limit(schema.minimum), limit(schema.maximum));
  return range === "" ? whole : `${whole}, ${range}`;
}

/** Limits at the edge of exact whole numbers only say that there is none. */
function limit(value: number | undefined): number | undefined {
  return value !== undefined && Math.abs(value) === Number.MAX_SAFE_INTEGER ? undefined : value;
}

function bounds(from: number | undefined, to: number | undefined): string {
  if (from === undefined) return to === undefined ? "" : `at most ${to}`;
  if (to === undefined) return `at least ${from}`;
  return from === to ? `${from}` : `${from} to ${to}`;
}
