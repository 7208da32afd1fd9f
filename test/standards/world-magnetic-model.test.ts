/**
 * The World Magnetic Model against its publishers' own test values: WMM2025_TEST_VALUES.txt (NOAA NCEI, December 2024),
 * Table 6 of the report *The US/UK World Magnetic Model for 2025-2030*, NOAA NCEI and British Geological Survey.
 */
import { describe, expect, it } from "vitest";
import { BendwatchError } from "../../bridge/errors.ts";
import { siteField } from "../../bridge/health/site-field.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";

/** Year, height above the ellipsoid km, latitude, longitude; X, Y, Z, F in nT; inclination and declination in degrees. */
const PUBLISHED = [
  [2025.0, 0, 80, 0, 6521.6, 145.9, 54791.5, 55178.5, 83.21, 1.28],
  [2025.0, 0, 0, 120, 39677.8, -109.6, -10580.2, 41064.3, -14.93, -0.16],
  [2025.0, 0, -80, 240, 6117.5, 15751.9, -52022.5, 54698.2, -72.0, 68.78],
  [2025.0, 100, 80, 0, 6216.0, 92.4, 52598.8, 52964.9, 83.26, 0.85],
  [2025.0, 100, 0, 120, 37688.6, -96.2, -10152.1, 39032.1, -15.08, -0.15],
  [2025.0, 100, -80, 240, 5907.6, 14780.3, -49540.7, 52035.0, -72.19, 68.21],
  [2027.5, 0, 80, 0, 6500.8, 294.5, 54869.4, 55253.9, 83.24, 2.59],
  [2027.5, 0, 0, 120, 39701.6, -167.4, -10381.8, 41036.9, -14.65, -0.24],
  [2027.5, 0, -80, 240, 6200.7, 15730.3, -51783.7, 54474.2, -71.92, 68.49],
  [2027.5, 100, 80, 0, 6196.7, 233.8, 52670.5, 53034.3, 83.29, 2.16],
  [2027.5, 100, 0, 120, 37711.5, -148.7, -9969.8, 39007.4, -14.81, -0.23],
  [2027.5, 100, -80, 240, 5984.0, 14760.1, -49317.7, 51825.7, -72.1, 67.93],
] as const;

/** Half of the last digit printed, with room for the rounding of a value that lies on it. */
const NT = 0.0501;
const DEG = 0.00501;

function dateOf(year: number): Date {
  const start = Date.UTC(Math.floor(year), 0, 1);
  return new Date(start + (year % 1) * (Date.UTC(Math.floor(year) + 1, 0, 1) - start));
}

describe("the World Magnetic Model 2025", () => {
  it.each(PUBLISHED)(
    "at %d, %d km, %d°, %d°",
    (year, km, latitudeDeg, longitudeDeg, x, y, z, f, incl, decl) => {
      const field = siteField({ latitudeDeg, longitudeDeg, heightM: km * 1000 }, dateOf(year));
      expect(Math.abs(field.northUT * 1000 - x)).toBeLessThan(NT);
      expect(Math.abs(field.eastUT * 1000 - y)).toBeLessThan(NT);
      expect(Math.abs(field.downUT * 1000 - z)).toBeLessThan(NT);
      expect(Math.abs(field.normUT * 1000 - f)).toBeLessThan(NT);
      expect(Math.abs(field.dipRad * DEG_PER_RAD - incl)).toBeLessThan(DEG);
      expect(Math.abs(field.declinationRad * DEG_PER_RAD - decl)).toBeLessThan(DEG);
    },
  );

  it("refuses dates no model holds for, instead of answering with a wrong or empty field", () => {
    const site = { latitudeDeg: 54.2, longitudeDeg: 8.9, heightM: 2 };
    for (const date of ["2010-01-01", "2031-01-01", "no date"]) {
      expect(() => siteField(site, new Date(date))).toThrow(BendwatchError);
    }
    expect(() => siteField(site, new Date("2029-11-13"))).not.toThrow();
  });
});
