/** Viscosity and density of water against published tables and check values. */
import { expect, test } from "vitest";
import { densityOf, kinematicViscosityOf, viscosityOf } from "../../bridge/wave/water.ts";

/** Dynamic viscosity of water, CRC Handbook of Chemistry and Physics, "Viscosity of Water", mPa s (from memory). */
const HANDBOOK_MPAS = [
  [10, 1.3059],
  [20, 1.0016],
  [30, 0.7972],
  [40, 0.6527],
] as const;

/** E. C. Tupper, Introduction to Naval Architecture, table 5.1: kinematic viscosity, 1e-6 m²/s, salt water of 3.5 %. */
const NAVAL = [
  { temperatureC: 0, fresh: 1.787, salt: 1.828 },
  { temperatureC: 10, fresh: 1.306, salt: 1.354 },
  { temperatureC: 20, fresh: 1.004, salt: 1.054 },
  { temperatureC: 30, fresh: 0.801, salt: 0.849 },
] as const;

test.each(HANDBOOK_MPAS)("fresh water of %d °C is as viscous as the handbook says", (temperatureC, mPaS) => {
  // The formula's own uncertainty is 0.05 %, that of the handbook 0.17 %.
  expect(Math.abs((1000 * viscosityOf(temperatureC, 0)) / mPaS - 1)).toBeLessThan(0.002);
});

test.each(NAVAL)(
  "kinematic viscosity of fresh and sea water of $temperatureC °C",
  ({ temperatureC, fresh, salt }) => {
    expect(Math.abs((1e6 * kinematicViscosityOf(temperatureC, 0)) / fresh - 1)).toBeLessThan(0.005);
    // The formula for sea water is good to 1.5 %.
    expect(Math.abs((1e6 * kinematicViscosityOf(temperatureC, 35)) / salt - 1)).toBeLessThan(0.015);
  },
);

test("sea water by another formula's check value: Millero 1974, 25 °C and 40 g/kg give 0.96541 mPa s", () => {
  expect(Math.abs(viscosityOf(25, 40) / 9.6541e-4 - 1)).toBeLessThan(0.015);
});

test("density: check values of EOS-80, UNESCO technical papers in marine science 44 (1983)", () => {
  // Printed to five places.
  expect(densityOf(5, 0)).toBeCloseTo(999.96675, 5);
  expect(densityOf(5, 35)).toBeCloseTo(1027.67547, 5);
  expect(densityOf(25, 35)).toBeCloseTo(1023.34306, 5);
});
