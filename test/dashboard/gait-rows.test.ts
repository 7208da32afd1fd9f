import { expect, test } from "vitest";
import type { GaitNumber } from "../../bridge/wire/gait.ts";
import type { GaitNumberView } from "../../bridge/wire/messages.ts";
import { gaitRows } from "../../dashboard/panels/gait-rows.ts";
import { healthyScene, tailbeatOf } from "../support/scene.ts";

const { wave, lengthM } = healthyScene();
const { numbers } = tailbeatOf(wave, lengthM);

function row(name: string, change: Partial<Record<GaitNumber, GaitNumberView>> = {}) {
  return gaitRows({ ...numbers, ...change }, lengthM).find((one) => one.name === name)!;
}

test("a good number has its unit and its scatter as a share", () => {
  expect(row("Tail amplitude")).toMatchObject({ value: "136 mm", beside: "22.0 % L  ± 1.2 %", doubt: "" });
  expect(row("Wave speed")).toMatchObject({ value: "1.03 m/s", beside: "± 1.2 %" });
});

test("an angle that may be zero has its scatter in degrees, and a true minus sign", () => {
  const meanBend = { value: -0.0366, spread: 0.0175, doubts: [] };
  expect(row("Mean bend", { meanBend })).toMatchObject({ value: "−2.1°", beside: "± 1.0°" });
});

test("a doubted number keeps its value and says the first reason; pointing at it tells all", () => {
  const phaseLag = { value: 5, spread: 0.1, doubts: ["bridged", "below noise"] as const };
  const doubted = row("Phase lag", { phaseLag });
  expect(doubted).toMatchObject({ value: "286°", doubt: "bridged" });
  expect(doubted.meaning).toContain("Doubted: bridged, below noise");
});

test("an unknown number is a dash, with the reason where there is one", () => {
  const reynolds = { value: null, spread: null, doubts: ["no temperature"] as const };
  expect(row("Reynolds number", { reynolds })).toMatchObject({
    value: "–",
    beside: "",
    doubt: "no temperature",
  });
  for (const { value, beside, doubt } of gaitRows(undefined, lengthM)) {
    expect([value, beside, doubt]).toEqual(["–", "", ""]);
  }
});

test("a single beat has no scatter", () => {
  const slip = { value: 0.34, spread: null, doubts: [] };
  expect(row("Slip ratio", { slip })).toMatchObject({ value: "0.34", beside: "" });
});

test("a large number keeps three digits, in groups of three", () => {
  const reynolds = { value: 812_345, spread: 10, doubts: [] };
  expect(row("Reynolds number", { reynolds })).toMatchObject({ value: "812\u202f000", beside: "" });
});
