import { describe, expect, test } from "vitest";
import type { BendwatchError } from "../../bridge/errors.ts";
import { checkConfig } from "../../bridge/rig/load.ts";
import { rigSchema } from "../../bridge/rig/rig.ts";

const sensor = (name: string, station: number) => ({ name, station, model: "nine-axis-1000" });
const good = {
  name: "Foil",
  body: { kind: "foil", lengthMm: 640 },
  hub: { rateHz: 100 },
  sensors: [sensor("S1", 0.1), sensor("S2", 0.5), sensor("S3", 0.9)],
};

function faults(rig: unknown) {
  try {
    checkConfig("rig.json", rig, rigSchema);
  } catch (error) {
    return (error as BendwatchError).details.map(({ where, found, expected }) => [where, found, expected]);
  }
  return [];
}

test("a rig with body, hub and sensors is complete", () => {
  expect(faults(good)).toEqual([]);
});

test("one sensor is enough, none is not", () => {
  expect(faults({ ...good, sensors: [sensor("S1", 0.5)] })).toEqual([]);
  expect(faults({ ...good, sensors: [] })).toEqual([["rig.json, sensors", "[]", "array to have >=1 items"]]);
});

describe("what is wrong in a rig file is named by key, found and expected:", () => {
  test("stations out of order", () => {
    expect(faults({ ...good, sensors: [sensor("S1", 0.5), sensor("S2", 0.4)] })).toEqual([
      [
        "rig.json, sensors[1].station",
        "0.4",
        "a station greater than 0.5 (that of S1): sensors are listed nose to tail",
      ],
    ]);
  });

  test("two sensors at one station", () => {
    const found = faults({ ...good, sensors: [sensor("S1", 0.5), sensor("S2", 0.5)] });
    expect(found.map(([where]) => where)).toEqual(["rig.json, sensors[1].station"]);
  });

  test("two sensors of one name", () => {
    expect(faults({ ...good, sensors: [sensor("S1", 0.1), sensor("S2", 0.2), sensor("S1", 0.3)] })).toEqual([
      ["rig.json, sensors[2].name", '"S1"', "a name of its own (sensors[0] has it already)"],
    ]);
  });

  test("an unknown key, at the top and deep inside", () => {
    const odd = { ...sensor("S1", 0.1), mounting: { yawRad: 0.1 } };
    const unknown = ["a key that is not known here", "only the keys of the schema (see config/README.md)"];
    expect(faults({ ...good, colour: "red", sensors: [odd] })).toEqual([
      ["rig.json, sensors[0].mounting.yawRad", ...unknown],
      ["rig.json, colour", ...unknown],
    ]);
  });

  test("a length without its unit in the key: the right key is missing, the given one unknown", () => {
    const found = faults({ ...good, body: { kind: "foil", length: 0.64 } });
    expect(found.map(([where, value]) => [where, value])).toEqual([
      ["rig.json, body.lengthMm", "nothing"],
      ["rig.json, body.length", "a key that is not known here"],
    ]);
  });

  test.each([
    ["a text for a number", { body: { kind: "foil", lengthMm: "640" } }, "body.lengthMm", '"640"', "number"],
    ["a value out of range", { hub: { rateHz: 0.5 } }, "hub.rateHz", "0.5", "number to be >=1"],
    ["another word", { heading: "compass" }, "heading", '"compass"', 'one of "magnetic"|"relative"|"free"'],
    ["a missing group", { hub: undefined }, "hub", "nothing", "object"],
    [
      "a port by two ways",
      { hub: { rateHz: 9, port: {} } },
      "hub.port",
      "{}",
      "either path or usbSerialNumber",
    ],
  ])("%s", (_, change, key, found, expected) => {
    expect(faults({ ...good, ...change })).toEqual([[`rig.json, ${key}`, found, expected]]);
  });

  test("everything at once, order and names among sensors that are wrong in other ways too", () => {
    const wrong = {
      ...good,
      name: "",
      colour: 1,
      body: { kind: "fish", lengthMm: "640" },
      sensors: [sensor("S1", 0.5), { ...sensor("S1", 0.4), model: 7, serial: null }, { station: 2 }, null],
    };
    expect(
      faults(wrong)
        .map(([where]) => where)
        .sort(),
    ).toEqual(
      [
        "name",
        "colour",
        "body.kind",
        "body.lengthMm",
        "sensors[1].model",
        "sensors[1].serial",
        "sensors[1].station",
        "sensors[1].name",
        "sensors[2].name",
        "sensors[2].model",
        "sensors[2].station",
        "sensors[3]",
      ]
        .map((key) => `rig.json, ${key}`)
        .sort(),
    );
  });
});
