import { readdirSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { packageRoot } from "../../bridge/paths.ts";
import { loadConfig } from "../../bridge/rig/load.ts";
import { packetLayoutSchema, UNITS } from "../../bridge/rig/packet-layout.ts";

const shipped = readdirSync(join(packageRoot, "config", "layouts")).filter((name) => name.endsWith(".json"));

test.each(shipped)("%s passes the schema", (name) => {
  expect(
    loadConfig("layouts", name.replace(/\.json$/, ""), packetLayoutSchema).packets.length,
  ).toBeGreaterThan(0);
});

test.each([
  ["a unit of another quantity", { what: "gyro", at: 0, type: "i16", unit: "g" }],
  ["a reading without a unit", { what: "accel", at: 0, type: "i16" }],
  ["a number format that is none", { what: "sequence", at: 0, type: "u12" }],
  ["an axis that is none", { what: "gyro", at: 0, type: "i16", unit: "deg/s", axes: ["x", "y", "w"] }],
  ["a key of another kind of field", { what: "sequence", at: 0, type: "u16", unit: "s" }],
  ["a place before the frame", { what: "sequence", at: -1, type: "u16" }],
])("refused: %s", (_title, field) => {
  const layout = { name: "L", framing: { kind: "cobs" }, packets: [{ name: "one", fields: [field] }] };
  expect(packetLayoutSchema.safeParse(layout).success).toBe(false);
});

test("units become the ones used inside", () => {
  // By definition: 180° = π rad, 1 g = 9.80665 m/s² (3rd CGPM 1901), 1 gauss = 100 µT.
  expect(UNITS.gyro["deg/s"] * 180).toBeCloseTo(Math.PI, 15);
  expect(UNITS.accel.mg * 1000).toBeCloseTo(9.80665, 15);
  expect(UNITS.mag.gauss).toBe(100);
  expect(UNITS.mag.mG).toBe(0.1);
  expect(UNITS.tick.ms).toBe(1000);
});
