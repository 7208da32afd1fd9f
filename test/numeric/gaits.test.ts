import { expect, test } from "vitest";
import { GAITS, polynomialGait } from "../../bridge/numeric/gaits.ts";

test("an envelope by its coefficients is the gait with that polynomial, slope included", () => {
  const given = polynomialGait([0.02, -0.08, 0.16], 0.95);
  for (const x of [0, 0.25, 0.7, 1]) {
    expect(given.amplitude(x)).toBeCloseTo(GAITS.carangiform.amplitude(x), 15);
    expect(given.slope(x)).toBeCloseTo(GAITS.carangiform.slope(x), 15);
  }
});

test.each([
  ["carangiform", GAITS.carangiform],
  ["anguilliform", GAITS.anguilliform],
  ["of a cubic", polynomialGait([0.03, 0.01, -0.05, 0.12], 0.8)],
])("the %s slope is the amplitude's derivative", (_, gait) => {
  const h = 1e-5; // a centred difference is off by h² times the third derivative: below 1e-10
  for (const x of [0.1, 0.5, 0.9]) {
    expect(gait.slope(x)).toBeCloseTo((gait.amplitude(x + h) - gait.amplitude(x - h)) / (2 * h), 8);
  }
});
