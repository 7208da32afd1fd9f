/**
 * Normal gravity against the Geodetic Reference System 1980: H. Moritz, J. Geodesy 74 (2000) 128, the figures for equator,
 * pole and 45°, and the free-air gradient that textbooks give for 45° (0.3086 mGal a metre; from memory).
 */
import { expect, test } from "vitest";
import { normalGravity } from "../../bridge/numeric/gravity.ts";

test.each([
  [0, 9.7803267715],
  [90, 9.8321863685],
  [-90, 9.8321863685],
  [45, 9.8061992],
])("on the ellipsoid at %d°", (latitudeDeg, expected) => {
  // Figures as published; seven decimals for 45°.
  expect(Math.abs(normalGravity(latitudeDeg) - expected)).toBeLessThan(latitudeDeg === 45 ? 6e-8 : 1e-9);
});

test("falls with height by the free-air gradient", () => {
  expect((normalGravity(45, 0) - normalGravity(45, 1000)) / 1000).toBeCloseTo(3.086e-6, 8);
});
