import { expect, test } from "vitest";
import { roundStep, stationX } from "../../dashboard/lanes/lane.ts";
import { bodyColour, mix, type Palette } from "../../dashboard/lanes/palette.ts";

const palette: Palette = {
  ground: 0,
  ink: 0,
  soft: 0,
  hairline: 0,
  faint: 0,
  notice: 0,
  caution: 0,
  alarm: 0,
  body: [0x000000, 0x102030, 0x203040, 0x304050, 0xffffff],
};

test("stations lie on the ruler between nose and tail", () => {
  const box = { top: 0, height: 10, nose: 138, tail: 1070 };
  expect(stationX(box, 0)).toBe(138);
  expect(stationX(box, 1)).toBe(1070);
  expect(stationX(box, 0.5)).toBe(604);
});

test.each([
  [0.7, 1],
  [1, 1],
  [1.01, 2],
  [0.02, 0.02],
  [0.021, 0.05],
  [0.3, 0.5],
  [6, 10],
  [1200, 2000],
])("the round step for %d is %d", (value, step) => {
  // Powers of ten are not exact in binary.
  expect(roundStep(value)).toBeCloseTo(step, 12);
});

test("mixing colours takes the share of each channel by itself", () => {
  expect(mix(0x000000, 0xffffff, 0)).toBe(0x000000);
  expect(mix(0x000000, 0xffffff, 1)).toBe(0xffffff);
  expect(mix(0x102030, 0x304050, 0.5)).toBe(0x203040);
  expect(mix(0x00ff00, 0xff00ff, 0.2)).toBe(0x33cc33);
});

test("the body's colour runs through all five from nose to tail, and holds beyond the ends", () => {
  expect([0, 0.25, 0.5, 0.75, 1].map((station) => bodyColour(palette, station))).toEqual(palette.body);
  expect(bodyColour(palette, 0.125)).toBe(mix(palette.body[0]!, palette.body[1]!, 0.5));
  expect(bodyColour(palette, -1)).toBe(palette.body[0]);
  expect(bodyColour(palette, 2)).toBe(palette.body[4]);
});
