import { expect, test } from "vitest";
import { clock, duration, flagTitle, millimetres, percent, unbroken } from "../../dashboard/panels/text.ts";

test.each([
  [-1, "0.0 s"],
  [0.34, "0.3 s"],
  [12.9, "12 s"],
  [89, "89 s"],
  [90, "1 min"],
  [5399, "89 min"],
  [7300, "2 h"],
])("%d s is written %s", (s, text) => {
  expect(duration(s)).toBe(text);
});

test.each([
  [-3, "00:00"],
  [0, "00:00"],
  [59.99, "00:59"],
  [257.9, "04:17"],
  [3729, "1:02:09"],
])("%d s on a clock is %s", (s, text) => {
  expect(clock(s)).toBe(text);
});

test("lengths and shares have the digits that can be read off", () => {
  expect(millimetres(0.1284)).toBe("128 mm");
  expect(millimetres(0.0384)).toBe("38.4 mm");
  expect(percent(0.07)).toBe("7 %");
  expect(percent(0.99984, 2)).toBe("99.98 %");
});

test("numbers stay with their unit, words are left alone", () => {
  expect(unbroken("42 % over 60 s at 58 % of 3 sensors")).toBe(
    "42\u00a0% over 60\u00a0s at 58\u00a0% of 3 sensors",
  );
});

test("a flag of the whole rig is named by its kind alone", () => {
  const flag = {
    id: 1,
    kind: "link silent",
    sensor: -1,
    severity: "alarm",
    startS: 0,
    endS: null,
    detail: "",
    advice: "",
  } as const;
  expect(flagTitle(flag, null)).toBe("Link silent");
  expect(flagTitle({ ...flag, kind: "stuck axis", sensor: 2 }, null)).toBe("Sensor 3 stuck axis");
});
