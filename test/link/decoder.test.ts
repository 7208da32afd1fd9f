import { expect, test } from "vitest";
import { createDecoder } from "../../bridge/link/decoder.ts";
import { NativeEncoder } from "../../bridge/link/native-encoder.ts";
import { loadConfig, loadRig, type Rig } from "../../bridge/rig/load.ts";
import { packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";
import { Log } from "./log.ts";

const ribbon = loadRig("ribbon-foil");

test("a rig without a declared layout is read as native packets", () => {
  const log = new Log();
  const sensors = ribbon.sensors.map(({ serial }) => ({ gyroScale: 1, accelScale: 1, magScale: 1, serial }));
  const decoder = createDecoder(ribbon, log);
  decoder.push(new NativeEncoder({ tickUs: 0, rateHz: 100, hubSerial: "H", sensors }).hello(0), 0);
  expect(log.kinds).toEqual(["hello"]);
});

test("a rig of text lines is read by its models' columns", () => {
  const rig: Rig = { ...ribbon, hub: { ...ribbon.hub, layout: "text" } };
  const log = new Log();
  createDecoder(rig, log).push(Buffer.from(`1,2${",0".repeat(6 * 9)}\n`), 0);
  expect(log.kinds).toEqual(["sweep"]);
});

test("a rig with a declared layout is read by it", () => {
  const packetLayout = loadConfig("layouts", "slip-ring", packetLayoutSchema);
  const log = new Log();
  createDecoder({ ...ribbon, packetLayout }, log).push(Buffer.from("02404b4c001810ddff7d3fc0", "hex"), 0);
  expect(log.kinds).toEqual(["status"]);
});
