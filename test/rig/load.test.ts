import { mkdtempSync, readdirSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, test } from "vitest";
import { packageRoot } from "../../bridge/paths.ts";
import { columnMapSchema } from "../../bridge/rig/column-map.ts";
import { loadConfig, loadRig } from "../../bridge/rig/load.ts";
import { packetLayoutSchema } from "../../bridge/rig/packet-layout.ts";
import { sensorModelSchema } from "../../bridge/rig/sensor-model.ts";

const folder = mkdtempSync(join(tmpdir(), "bendwatch-rig-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function fileOf(name: string, content: unknown): string {
  const path = join(folder, name);
  writeFileSync(path, typeof content === "string" ? content : JSON.stringify(content));
  return path;
}

const sensor = (name: string, station: number, model: string) => ({ name, station, model });
const rigOf = (sensors: unknown, rest: object = {}) => ({
  name: "Foil",
  body: { kind: "foil", lengthMm: 640 },
  hub: { rateHz: 100 },
  sensors,
  ...rest,
});

const shipped = (kind: string) =>
  readdirSync(join(packageRoot, "config", kind)).map((name) => name.replace(".json", ""));

describe("what is shipped under config/", () => {
  test.each(shipped("rigs"))("rig %s loads with its models", (name) => {
    const rig = loadRig(name);
    expect(rig.models).toHaveLength(rig.sensors.length);
  });
  test.each(shipped("sensors"))("sensor model %s loads", (name) => {
    expect(loadConfig("sensors", name, sensorModelSchema).name).not.toBe("");
  });
  test.each(shipped("columns"))("column map %s loads", (name) => {
    expect(loadConfig("columns", name, columnMapSchema).name).not.toBe("");
  });
});

describe("a loaded rig", () => {
  const model = fileOf("own-model.json", {
    name: "Own",
    gyro: { rangeDegPerS: 250, noiseDegPerSPerSqrtHz: 0.01, biasDegPerS: 1 },
    accel: { rangeG: 4, noiseMicroGPerSqrtHz: 100, biasMilliG: 10 },
  });

  test("has its models in the order of the sensors, by name or by path", () => {
    const path = fileOf("rig.json", rigOf([sensor("A", 0.1, model), sensor("B", 0.5, "nine-axis-500")]));
    expect(loadRig(path).models.map(({ gyro }) => gyro.rangeDegPerS)).toEqual([250, 500]);
  });

  test("takes its own thresholds over those of config/thresholds.json", () => {
    const path = fileOf(
      "flags.json",
      rigOf([sensor("A", 0.1, model)], { flags: { lowHeadroomShare: 0.25 } }),
    );
    const plain = loadRig(fileOf("plain.json", rigOf([sensor("A", 0.1, model)])));
    expect(loadRig(path).thresholds).toEqual({ ...plain.thresholds, lowHeadroomShare: 0.25 });
    expect(plain.thresholds.lowHeadroomShare).not.toBe(0.25);
  });

  test("is frozen through and through", () => {
    const rig = loadRig("ribbon-foil");
    const loose: unknown[] = [];
    const visit = (value: unknown) => {
      if (value === null || typeof value !== "object") return;
      if (!Object.isFrozen(value)) loose.push(value);
      Object.values(value).forEach(visit);
    };
    visit(rig);
    expect(loose).toEqual([]);
    expect(() => {
      (rig.sensors[0] as { station: number }).station = 0;
    }).toThrow(TypeError);
  });
});

describe("what cannot be loaded", () => {
  test("a rig that is not there is named with its path", () => {
    expect(() => loadRig("no-such-rig")).toThrow(
      expect.objectContaining({
        code: "CONFIG_UNREADABLE",
        details: [
          {
            where: join(packageRoot, "config/rigs/no-such-rig.json"),
            found: expect.stringContaining("ENOENT"),
            expected: 'a readable file of kind "rigs"',
          },
        ],
      }),
    );
  });

  test("a file that is no JSON is named", () => {
    const path = fileOf("broken.json", "{ name: ");
    expect(() => loadRig(path)).toThrow(
      expect.objectContaining({
        code: "CONFIG_UNREADABLE",
        details: [expect.objectContaining({ where: path, expected: "valid JSON" })],
      }),
    );
  });

  test("missing and wrong sensor models and a missing layout are all reported at once, each once", () => {
    const wrong = fileOf("wrong-model.json", { name: "Wrong", gyro: { rangeDegPerS: -1 }, colour: 1 });
    const path = fileOf(
      "lost.json",
      rigOf(
        [
          sensor("A", 0.1, "no-such-model"),
          sensor("B", 0.2, "no-such-model"),
          sensor("C", 0.3, wrong),
          sensor("D", 0.4, "six-axis-2000"),
        ],
        { hub: { rateHz: 100, layout: "no-such-layout" } },
      ),
    );
    const places = [
      `sensors[0].model: ${join(packageRoot, "config/sensors/no-such-model.json")}`,
      `sensors[2].model: ${wrong}, gyro.rangeDegPerS`,
      `sensors[2].model: ${wrong}, gyro.noiseDegPerSPerSqrtHz`,
      `sensors[2].model: ${wrong}, gyro.biasDegPerS`,
      `sensors[2].model: ${wrong}, accel`,
      `sensors[2].model: ${wrong}, colour`,
      `hub.layout: ${join(packageRoot, "config/layouts/no-such-layout.json")}`,
    ];
    expect(() => loadRig(path)).toThrow(
      expect.objectContaining({
        details: places.map((place) => expect.objectContaining({ where: `${path}, ${place}` })),
      }),
    );
  });

  test("an unknown unit in a packet layout is named with the units that are known", () => {
    const field = { what: "gyro", at: 4, type: "i16", unit: "rpm" };
    const layout = {
      name: "Bench hub",
      framing: { kind: "cobs" },
      packets: [{ name: "sweep", fields: [field, { what: "accel", at: 10, type: "i16", unit: "g" }] }],
    };
    const path = fileOf("layout.json", layout);
    expect(() => loadConfig("layouts", path, packetLayoutSchema)).toThrow(
      `${path}, packets[0].fields[0].unit: found "rpm"; expected one of "rad/s"|"deg/s"`,
    );
  });
});
