import { expect, test } from "vitest";
import { stationX } from "../../dashboard/lanes/lane.ts";
import { bodyColour, mix } from "../../dashboard/look/palette.ts";

const body = [0x000000, 0x102030, 0x203040, 0x304050, 0xffffff];

test("stations lie on the ruler between nose and tail", () => {
  const ruler = { left: 138, width: 932 };
  expect(stationX(ruler, 0)).toBe(138);
  expect(stationX(ruler, 1)).toBe(1070);
  expect(stationX(ruler, 0.5)).toBe(604);
});

test("mixing colours takes the share of each channel by itself", () => {
  expect(mix(0x000000, 0xffffff, 0)).toBe(0x000000);
  expect(mix(0x000000, 0xffffff, 1)).toBe(0xffffff);
  expect(mix(0x102030, 0x304050, 0.5)).toBe(0x203040);
  expect(mix(0x00ff00, 0xff00ff, 0.2)).toBe(0x33cc33);
});

test("the body's colour runs through all five from nose to tail, and holds beyond the ends", () => {
  expect([0, 0.25, 0.5, 0.75, 1].map((station) => bodyColour(body, station))).toEqual(body);
  expect(bodyColour(body, 0.125)).toBe(mix(body[0]!, body[1]!, 0.5));
  expect(bodyColour(body, -1)).toBe(body[0]);
  expect(bodyColour(body, 2)).toBe(body[4]);
});
