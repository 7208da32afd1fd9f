import { Command } from "commander";
import { expect, test } from "vitest";
import { inWater, type WaterOptions, withWaterOptions } from "../../bridge/commands/options.ts";
import { loadRig } from "../../bridge/rig/load.ts";

const rig = loadRig("ribbon-foil");

function parse(...words: string[]): WaterOptions {
  const command = withWaterOptions(new Command("swim"))
    .exitOverride()
    .configureOutput({ writeErr() {} });
  return command.parse(words, { from: "user" }).opts();
}

test("flow speed and water temperature of the day replace the rig's", () => {
  const given = inWater(rig, parse("--flow", "0.45", "--water-temperature", "-1.5"));
  expect(given.water).toEqual({ ...rig.water, flowMPerS: 0.45, temperatureC: -1.5 });
});

test("what is not given stays as the rig file says", () => {
  expect(inWater(rig, parse()).water).toEqual(rig.water);
});

test.each(["", "fast", "-0.1", "31", "NaN"])("a flow of %j is refused", (flow) => {
  expect(() => parse(`--flow=${flow}`)).toThrow(/expected a number from 0 to 30/);
});
