/**
 * Describes an export as a Data Package (Frictionless specifications v1: Data Package, Tabular Data Resource, Table
 * Schema; specs.frictionlessdata.io), with the unit of every column. `unit` is a property of our own beside those of
 * Table Schema, which allows it.
 */
import type { WrittenFile } from "./table-file.ts";
import type { Column } from "./tables.ts";

export const DATA_PACKAGE_FILE = "datapackage.json";
export const SUMMARY_FILE = "summary.json";
/** By this value's start an earlier export is recognised. */
export const SOFTWARE_PREFIX = "bendwatch ";

export interface PackageFacts {
  readonly trialName: string;
  readonly rigName: string;
  readonly softwareVersion: string;
}

/** The descriptor of an export: one resource a table, and the summary. */
export function describePackage(facts: PackageFacts, files: readonly WrittenFile[]): object {
  return {
    profile: "data-package",
    name: packageName(facts.trialName),
    title: `${facts.trialName}, ${facts.rigName}`,
    description:
      "Midline, orientations, gait numbers and flags of one trial. Times are hub time in seconds since the first sweep.",
    software: `${SOFTWARE_PREFIX}${facts.softwareVersion}`,
    resources: [
      ...files.map(describeTable),
      {
        profile: "data-resource",
        name: "summary",
        path: SUMMARY_FILE,
        description: "The rig, durations, rates, counts, losses, steady swimming and settings of the trial.",
        format: "json",
        mediatype: "application/json",
        encoding: "utf-8",
      },
    ],
  };
}

function describeTable({ table, path, bytes, sha256 }: WrittenFile): object {
  return {
    profile: "tabular-data-resource",
    name: table.name,
    path,
    description: table.description,
    format: "csv",
    mediatype: "text/csv",
    encoding: "utf-8",
    bytes,
    hash: `sha256:${sha256}`,
    schema: { fields: table.columns.map(describeColumn), missingValues: [""] },
  };
}

function describeColumn(column: Column): object {
  const booleans = column.type === "boolean" ? { trueValues: ["1"], falseValues: ["0"] } : {};
  return { ...column, format: "default", ...booleans };
}

/** Lower-case letters, digits, ".", "_" and "-" only, as the specification asks of names. */
function packageName(trialName: string): string {
  const name = trialName
    .toLowerCase()
    .replaceAll(/[^a-z0-9._-]+/g, "-")
    .replaceAll(/^[.-]+|[.-]+$/g, "");
  return name === "" ? "trial" : name;
}
