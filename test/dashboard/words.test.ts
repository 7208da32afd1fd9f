import { expect, test } from "vitest";
import { clock, duration, percent } from "../../dashboard/panels/words.ts";

test.each([
  [0, "00:00"],
  [-3, "00:00"],
  [59.99, "00:59"],
  [257, "04:17"],
  [3599, "59:59"],
  [3857, "1:04:17"],
  [90_061, "25:01:01"],
])("%d seconds on a clock are %s", (seconds, text) => {
  expect(clock(seconds)).toBe(text);
});

test.each([
  [-0.2, "0.0 s"],
  [0.34, "0.3 s"],
  [12.4, "12 s"],
  [99, "99 s"],
  [180, "3 min"],
  [5399, "90 min"],
  [7200, "2 h"],
])("%d seconds last %s", (seconds, text) => {
  expect(duration(seconds)).toBe(text);
});

test.each([
  [0, "0 %"],
  [0.31, "31 %"],
  [0.996, "100 %"],
  [1, "100 %"],
])("a share of %d is %s", (share, text) => {
  expect(percent(share)).toBe(text);
});
