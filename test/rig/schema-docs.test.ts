import { readFileSync } from "node:fs";
import { expect, test } from "vitest";
import { columnMapSchema } from "../../bridge/rig/column-map.ts";
import { packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";
import { rigSchema } from "../../bridge/rig/rig.ts";
import { CONFIG_README, configReadme } from "../../bridge/rig/schema-docs.ts";
import { keyRows } from "../../bridge/rig/schema-keys.ts";
import { sensorModelSchema } from "../../bridge/rig/sensor-model.ts";
import { thresholdsSchema } from "../../bridge/rig/thresholds.ts";

test("config/README.md says what the schemas say (else run: npx tsx bridge/rig/schema-docs.ts)", () => {
  expect(readFileSync(CONFIG_README, "utf8")).toBe(configReadme());
});

test.each([
  ["rigs", rigSchema],
  ["sensor models", sensorModelSchema],
  ["thresholds", thresholdsSchema],
  ["packet layouts", packetLayoutSchema],
  ["column maps", columnMapSchema],
])("every key of %s has a meaning", (_, schema) => {
  expect(keyRows(schema).filter(({ meaning }) => meaning === "")).toEqual([]);
});
