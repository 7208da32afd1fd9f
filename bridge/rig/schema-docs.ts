/**
 * Writes config/README.md from the schemas, so that keys, units, defaults, ranges and meanings stand in one place:
 *
 *     npx tsx bridge/rig/schema-docs.ts
 *
 * A test holds the page to the schemas.
 */
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { packageRoot } from "../paths.ts";
import { calibrationRecordSchema } from "./calibration-record.ts";
import { checkLimitsSchema } from "./check-limits.ts";
import { columnMapSchema } from "./column-map.ts";
import { packetLayoutSchema } from "./packet-layout.ts";
import { rigSchema } from "./rig.ts";
import { type KeyRow, keyRows } from "./schema-keys.ts";
import { sensorModelSchema } from "./sensor-model.ts";
import { thresholdsSchema } from "./thresholds.ts";

export const CONFIG_README = join(packageRoot, "config/README.md");

/** A Markdown table, its columns padded to line up as the formatter wants them. */
function table(rows: readonly KeyRow[]): string {
  const cells = rows.map((row) =>
    [`\`${row.key}\``, row.unit, row.default, row.range, row.meaning].map((text) =>
      text.replaceAll("|", "\\|"),
    ),
  );
  const head = ["key", "unit", "default", "range", "meaning"];
  const widths = head.map((name, c) => Math.max(...[name, ...cells.map((row) => row[c]!)].map(widthOf)));
  const line = (row: readonly string[]) =>
    `| ${row.map((text, c) => text + " ".repeat(widths[c]! - widthOf(text))).join(" | ")} |`;
  return [line(head), line(widths.map((width) => "-".repeat(width))), ...cells.map(line)].join("\n");
}

function widthOf(text: string): number {
  return [...text].length;
}

/** The whole page. */
export function configReadme(): string {
  const thresholds = JSON.parse(readFileSync(join(packageRoot, "config/thresholds.json"), "utf8"));
  const checkLimits = JSON.parse(readFileSync(join(packageRoot, "config/check.json"), "utf8"));
  const rigRows = keyRows(rigSchema).filter(({ key }) => !/^(flags|check)\./.test(key));
  const withValues = (rows: readonly KeyRow[], values: Record<string, number>) =>
    rows.map((row) => ({ ...row, default: String(values[row.key]) }));
  return `# Configuration

Written by \`npx tsx bridge/rig/schema-docs.ts\` from the schemas in \`bridge/rig/\`; change those, not this page.

JSON files, one folder a kind. Where a command or another file asks for one, give its name without \`.json\`, or a path.
A key that is not listed here is an error, and so is a value of another type or out of range; everything wrong in a file
is reported at once. Units other than SI stand in the key's name. \`left out\`: the key may be missing and then stands for
nothing. Counts and lists run from the nose to the tail.

## Rigs: \`config/rigs/\`

Body, sensors and where they sit, hub, site. Stations increase and names differ.

${table(rigRows)}

## Sensor models: \`config/sensors/\`

Ranges, noise and rates as a data sheet gives them.

${table(keyRows(sensorModelSchema))}

## Calibration records: \`config/calibrations/<serial>/\`

Written by \`bendwatch calibrate\`, one file a sensor and procedure; added, never changed. A rig's sensors take the newest of
each kind by their serial number, or those they name under \`records\`.

${table(keyRows(calibrationRecordSchema))}

## Thresholds: \`config/thresholds.json\`

One file; here \`default\` is what it says. A rig overrides any of them under \`flags\`.

${table(withValues(keyRows(thresholdsSchema), thresholds))}

## Release check: \`config/check.json\`

Limits of \`bendwatch check\`; here \`default\` is what the file says. A rig overrides any of them under \`check\`.

${table(withValues(keyRows(checkLimitsSchema), checkLimits))}

## Packet layouts: \`config/layouts/\`

Somebody's existing packets described, for \`hub.layout\`.

${table(keyRows(packetLayoutSchema))}

## Column maps: \`config/columns/\`

Which column of a table holds what, for \`bendwatch import\`. Plain text or gzipped; exponents as in \`1.2e-005\`.

- Times are rounded to whole µs and kept, irregular ones too. Within a file each must be later than the one before.
- An empty cell, NaN or a declared marker: that gyro, accel or mag is lost in that row. A cell that is no number: likewise,
  and counted; more of them in a column than one in a hundred rows (one is always allowed) and the table is refused.
- Every row must have a cell for each column; further cells must be empty.
- Where at least 95 of 100 steps in time are whole numbers of intervals (within a tenth of one), a step of 1.5 intervals or
  more shows as lost sweeps. In other tables sweeps are only counted.
- All tables are read and checked before anything is written.

${table(keyRows(columnMapSchema))}
`;
}

if (process.argv[1] === fileURLToPath(import.meta.url)) writeFileSync(CONFIG_README, configReadme());
